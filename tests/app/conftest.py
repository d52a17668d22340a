import pytest

from app.transmitters.template import read_template


@pytest.fixture
def read(tmp_path):
    """Read text or bytes as a CSV of transmitters."""

    def read(content, name="mine.csv"):
        path = tmp_path / name
        path.write_bytes(content if isinstance(content, bytes) else content.encode())
        return read_template(path)

    return read
