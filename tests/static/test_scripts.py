"""The pure modules of the page, by Node's own test runner."""

import re
import subprocess
from pathlib import Path

import pytest

HERE = Path(__file__).parent
pytestmark = pytest.mark.node


def test_every_node_test_passes():
    files = sorted(str(path) for path in HERE.glob("*.test.js"))
    assert len(files) >= 7
    run = subprocess.run(
        ["node", "--test", "--test-reporter=tap", *files], capture_output=True, text=True, timeout=120, check=False
    )
    assert run.returncode == 0, run.stdout[-4000:] + run.stderr[-1000:]
    passed = re.search(r"^# pass (\d+)$", run.stdout, re.MULTILINE)
    assert passed is not None
    assert int(passed[1]) >= 70


def test_every_script_parses(repository):
    for path in sorted((repository / "static" / "scripts").glob("*.js")):
        run = subprocess.run(["node", "--check", str(path)], capture_output=True, text=True, timeout=30, check=False)
        assert run.returncode == 0, f"{path.name}: {run.stderr}"
