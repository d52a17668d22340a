import pytest

from app.errors import StoreError
from app.settings import load_settings


def test_without_a_file_the_defaults_hold(tmp_path):
    settings = load_settings(tmp_path)
    assert (settings.host, settings.port, settings.workers) == ("127.0.0.1", 8790, 4)


def test_the_file_overrules_the_defaults_and_the_environment_the_file(tmp_path, monkeypatch):
    (tmp_path / "settings.toml").write_text('port = 9000\nworkers = 2\nhost_names = ["roof.example"]\n')
    monkeypatch.setenv("GAINWORTH_PORT", "9100")
    settings = load_settings(tmp_path)
    assert (settings.port, settings.workers, settings.host_names) == (9100, 2, ["roof.example"])


def test_folders_in_the_environment_are_no_settings(tmp_path, monkeypatch):
    monkeypatch.setenv("GAINWORTH_DATA_DIR", str(tmp_path))
    monkeypatch.setenv("GAINWORTH_TEST_ALL", "1")
    assert load_settings(tmp_path).port == 8790


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("prt = 9000", '"prt" is not a setting: use host, port'),
        ("port = 99999", "setting port is 99999 in settings.toml or GAINWORTH_PORT: .*65535"),
        ("port =", "cannot be read"),
        ("workers = 0", "setting workers is 0"),
    ],
)
def test_a_wrong_file_says_what_is_wrong(tmp_path, text, words):
    (tmp_path / "settings.toml").write_text(text)
    with pytest.raises(StoreError, match=words):
        load_settings(tmp_path)


def test_a_wrong_variable_names_itself(tmp_path, monkeypatch):
    monkeypatch.setenv("GAINWORTH_PORT", "none")
    with pytest.raises(StoreError, match=r"setting port is 'none' in settings\.toml or GAINWORTH_PORT"):
        load_settings(tmp_path)
