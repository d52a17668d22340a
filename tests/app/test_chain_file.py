"""Chains and parts as one TOML file, in and out."""

import tomllib

import pytest

from app.chain.catalogue import demo_chains
from app.chain.document import chain_from_document
from app.chain_file import export_text, import_file, import_text, read_text, stored_parts
from app.errors import ChainError, NotStoredError
from app.transmitters.store import Store

ONE = """
[[chains]]
name = "mine"
[[chains.parts]]
kind = "aerial"
id = "a"
name = "Yagi"
gain_dbd = [[470, 6], [694, 10]]
beamwidth_deg = 50
front_to_back_db = 18
[[chains.parts]]
kind = "outlet"
id = "o"
name = "Kitchen"
[[chains.parts]]
kind = "receiver"
id = "r"
name = "set"
[[parts]]
kind = "feeder"
id = "f20"
name = "20 m"
cable = "copper-7mm"
length_m = 20
price = 14
"""


@pytest.fixture
def store(tmp_path):
    return Store.open(tmp_path)


def test_file_goes_in_and_out_again(store):
    brought = import_text("mine.toml", ONE, store)
    assert (brought.added, brought.changed, brought.parts) == (("mine",), (), ("f20",))
    text = export_text(store)
    chains, parts = read_text("again.toml", text)
    assert [chain.name for chain in chains] == ["mine"]
    assert parts == list(stored_parts(store))
    assert parts[0].price == 14
    assert import_text("again.toml", text, store).changed == ("mine",)
    assert export_text(store) == text


def test_every_demo_chain_survives_the_file(demo_world):
    written = tomllib.loads(export_text(demo_world.store))["chains"]
    assert [chain_from_document(one) for one in written] == list(demo_chains())


def test_only_named_chains_are_written(demo_world):
    written = tomllib.loads(export_text(demo_world.store, ["roof-yagi"]))
    assert [one["name"] for one in written["chains"]] == ["roof-yagi"]
    assert "parts" not in written
    with pytest.raises(NotStoredError, match='there is no chain "none"'):
        export_text(demo_world.store, ["none"])


def test_dry_run_stores_nothing(store):
    assert import_text("mine.toml", ONE, store, dry_run=True).added == ("mine",)
    assert store.list_chains() == []


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("[[chains]", r"mine.toml: is no TOML .*line 1.*: mend that line, or begin with `gainworth chains export`"),
        ("colour = 1", r'mine.toml: holds "colour": use \[\[chains\]\] and \[\[parts\]\]'),
        ("# nothing", r"mine.toml: holds nothing: use"),
        ("chains = 3", r"mine.toml: chains is no list of tables: write \[\[chains\]\] above each"),
        (
            ONE.replace("front_to_back_db = 18", ""),
            r'mine.toml: chain "[^"]*": aerial "Yagi": front_to_back_db is missing: add it',
        ),
        (ONE.replace("length_m = 20", "length_m = -2"), r'feeder "20 m": length_m -2 is not possible: use 0 to 1000'),
        (ONE + ONE, r'mine.toml: chain "mine" comes twice'),
    ],
)
def test_wrong_file_is_refused_as_a_whole(store, text, message):
    with pytest.raises(ChainError, match=message):
        import_text("mine.toml", text, store)
    assert store.list_chains() == []
    assert store.list_parts() == []


def test_missing_and_huge_files_are_refused_by_name(store, tmp_path):
    with pytest.raises(ChainError, match=r"none.toml: there is no such file"):
        import_file(tmp_path / "none.toml", store)
    huge = tmp_path / "huge.toml"
    with huge.open("wb") as file:
        file.truncate(2_000_000_000)  # a hole, takes no room
    with pytest.raises(ChainError, match=r"huge\.toml"):
        import_file(huge, store)


@pytest.mark.parametrize(
    ("text", "told"),
    [
        ("a = " + "[" * 5000 + "]" * 5000, "is no TOML"),
        ("labour_price = " + "9" * 5000, "is no TOML"),
        (
            '[[parts]]\nkind = "feeder"\nid = "x"\nname = "x"\ncable = "copper-7mm"\nlength_m = ' + "9" * 400,
            "use a number",
        ),
        ('[[chains]]\nname = "a"\nname = "b"\n', "is no TOML"),
    ],
)
def test_nesting_and_numbers_that_no_parser_takes_are_refused(text, told):
    with pytest.raises(ChainError, match=told):
        read_text("mine.toml", text)
