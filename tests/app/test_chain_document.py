import json
import tomllib

import pytest

from app.chain.catalogue import demo_chains
from app.chain.document import chain_from_document, chain_to_document
from app.errors import ChainError

TOML = """
name = "mine"
title = "My aerial"
labour_price = 20
visit_price = 0
pointing_deg = 118
[[parts]]
kind = "aerial"
id = "a"
name = "Yagi"
price = 40
gain_dbd = [[470, 6], [694, 10.5]]
beamwidth_deg = 50
front_to_back_db = 18
[[parts]]
kind = "feeder"
id = "f"
name = "downlead"
cable = "series-6"
length_m = 12
[[parts]]
kind = "outlet"
id = "o"
name = "Kitchen"
[[parts]]
kind = "receiver"
id = "r"
name = "set"
"""


def document():
    return tomllib.loads(TOML)


def test_toml_reads_as_a_chain():
    chain = chain_from_document(document())
    assert chain.aerial.gain_dbd == ((470.0, 6.0), (694.0, 10.5))
    assert (chain.pointing_deg, chain.polarisation, chain.currency, chain.already_up) == (
        118,
        None,
        "EUR",
        False,
    )
    assert chain.parts[1].price is None
    assert chain.price is None
    assert chain.receiver.price == 0


@pytest.mark.parametrize("chain", demo_chains(), ids=lambda chain: chain.name)
def test_document_goes_there_and_back_through_json(chain):
    assert chain_from_document(json.loads(json.dumps(chain_to_document(chain)))) == chain


def test_price_not_known_survives_the_way_there_and_back():
    chain = chain_from_document({**document(), "labour_price": None})
    assert chain.labour_price is None
    assert chain_from_document(chain_to_document(chain)) == chain
    assert "labour_price" not in chain_to_document(chain)


def test_every_part_in_a_document_has_kind_id_name():
    for part in chain_to_document(demo_chains()[3])["parts"]:
        assert {"kind", "id", "name", "price"} <= set(part)


def changed(index=None, **changes):
    whole = document()
    (whole if index is None else whole["parts"][index]).update(changes)
    return whole


@pytest.mark.parametrize(
    ("wrong", "message", "field"),
    [
        ([], r"a chain is a table of keys and values, not \[\]", None),
        ("roof", r'not "roof": give at least name and parts', None),
        (changed(parts="aerial"), r'chain "My aerial": parts is "aerial": give a list of parts', "parts"),
        (
            changed(colour="red"),
            r'chain "My aerial": "colour" is not a key of it: use name, parts, currency',
            "colour",
        ),
        (changed(name=None), r'chain "My aerial": name is missing: add it', "name"),
        (changed(already_up="yes"), r'already_up is "yes": use true or false', "already_up"),
        (changed(pointing_deg=True), r"pointing_deg is True: use a number", "pointing_deg"),
        (
            changed(1, kind="rope"),
            r'part "downlead" is of kind "rope": use one of aerial, filter, masthead-amp',
            "parts[1].kind",
        ),
        (
            changed(1, lenght_m=3),
            r'feeder "downlead": "lenght_m" is not a key of it: use kind, id,',
            "parts[1].lenght_m",
        ),
        (
            changed(1, length_m="12 m"),
            r'feeder "downlead": length_m is "12 m": use a number',
            "parts[1].length_m",
        ),
        (changed(1, length_m=None), r'feeder "downlead": length_m is missing: add it', "parts[1].length_m"),
        (
            changed(1, length_m=-2),
            r'feeder "downlead": length_m -2 is not possible: use 0 to',
            "parts[1].length_m",
        ),
        (
            changed(0, gain_dbd=7),
            r'aerial "Yagi": gain_dbd holds 7: use a list of pairs',
            "parts[0].gain_dbd",
        ),
        (changed(0, gain_dbd=[[470, "x"], [600, 1]]), r'gain_dbd is "x": use a number', "parts[0].gain_dbd"),
        (changed(0, gain_dbd=[[470, 7]]), r"the gain table has one point", "parts[0].gain_dbd"),
        (changed(2, name=5), r'outlet "5": name is 5: use text', "parts[2].name"),
    ],
)
def test_wrong_document_names_place_part_and_mend(wrong, message, field):
    with pytest.raises(ChainError, match=message) as caught:
        chain_from_document(wrong)
    assert caught.value.field == field


def test_part_that_is_no_table_is_counted_out():
    whole = document()
    whole["parts"][1] = "feeder"
    with pytest.raises(
        ChainError, match=r'part 2 of the chain is "feeder": give a table with kind, id, name'
    ) as caught:
        chain_from_document(whole)
    assert caught.value.field == "parts[1]"


def test_a_fault_between_parts_names_the_chain_and_the_part_it_is_at():
    whole = document()
    whole["parts"][1]["after"] = "nowhere"
    with pytest.raises(ChainError, match=r'^chain "My aerial": feeder "downlead": is fed by "nowhere"') as caught:
        chain_from_document(whole)
    assert caught.value.field == "parts[1].after"
