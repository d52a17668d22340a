import dataclasses

import pytest

from app.chain.catalogue import demo_chains
from app.chain.parts import Aerial, Chain, Feeder, MastheadAmplifier, Outlet, Receiver, Splitter
from app.errors import ChainError

AERIAL = Aerial(id="a", name="Yagi", price=40, gain_dbd=((470, 6), (694, 10)), beamwidth_deg=50, front_to_back_db=18)
FEEDER = Feeder(id="f", name="downlead", price=10, cable="copper-7mm", length_m=15)
OUTLET = Outlet(id="o", name="Kitchen", price=4)
SECOND = Outlet(id="o2", name="Attic", price=4)
SET = Receiver(id="r", name="set")


def chain(*parts, **frame):
    return Chain("mine", parts, **{"labour_price": 20, "visit_price": 30, **frame})


def split(ports, outlets):
    rooms = [Outlet(id=f"o{i}", name=f"Room {i}", price=4) for i in range(outlets)]
    return chain(AERIAL, FEEDER, Splitter(id="s", name="splitter", price=8, ports=ports), *rooms, SET)


@pytest.mark.parametrize(
    ("kind", "changes", "message"),
    [
        (FEEDER, {"length_m": -3}, r'feeder "downlead": length_m -3 is not possible: use 0 to 1000 m'),
        (FEEDER, {"length_m": float("nan")}, r'feeder "downlead": length_m nan is not possible'),
        (
            FEEDER,
            {"cable": "string"},
            r'feeder "downlead": cable "string" is not known: use series-59, series-6,',
        ),
        (
            FEEDER,
            {"price": -1},
            r'feeder "downlead": price -1 is not possible: .* leave it out if it is not known',
        ),
        (FEEDER, {"id": " "}, r'feeder "downlead": id is empty: give it a short id'),
        (AERIAL, {"gain_dbd": ()}, r'aerial "Yagi": the gain table is empty: give at least two pairs'),
        (
            AERIAL,
            {"gain_dbd": ((600, 9),)},
            r'aerial "Yagi": the gain table has one point: give at least two',
        ),
        (
            AERIAL,
            {"gain_dbd": ((694, 9), (470, 8))},
            r'aerial "Yagi": in the gain table 470 MHz follows 694 MHz: sort it by rising frequency',
        ),
        (AERIAL, {"gain_dbd": ((600, 9), (600, 8))}, r"600 MHz follows 600 MHz"),
        (AERIAL, {"gain_dbd": ((600, 9), (700, float("inf")))}, r"gain_dbd: gain inf is not possible"),
        (AERIAL, {"beamwidth_deg": 0}, r"beamwidth_deg 0 is not possible: use 1 to 360 degrees"),
        (
            AERIAL,
            {"front_to_back_db": 2},
            r'leaves no half-power beamwidth: use more than 3 dB, pattern "dipole"',
        ),
        (
            AERIAL,
            {"beamwidth_deg": 360},
            r"a beamwidth of 360 degrees means round: set front_to_back_db to 0",
        ),
        (AERIAL, {"pattern": "star"}, r'pattern "star" is not known: use class, dipole'),
        (AERIAL, {"place": "garden"}, r'place "garden" is not known: use roof, loft'),
        (AERIAL, {"polarisation": "mixed"}, r'polarisation "mixed" is not known: use horizontal, vertical'),
        (OUTLET, {"loss_db": -1}, r'outlet "Kitchen": loss_db -1 is not possible: use 0 to 40 dB'),
        (
            SET,
            {"noise_figure_db": -0.5},
            r'receiver "set": noise_figure_db -0.5 is not possible: use 0 to 30 dB',
        ),
    ],
)
def test_impossible_part_is_refused_by_name_with_the_mend(kind, changes, message):
    with pytest.raises(ChainError, match=message):
        dataclasses.replace(kind, **changes)


@pytest.mark.parametrize(
    ("values", "message"),
    [
        (
            {"gain_db": 20, "noise_figure_db": -1},
            r'"amp": noise_figure_db -1 is not possible: use 0 to 20 dB',
        ),
        ({"gain_db": -2, "noise_figure_db": 2}, r'"amp": gain_db -2 is not possible: use 0 to 60 dB'),
        (
            {"gain_db": 20, "noise_figure_db": 2, "rated_output_dbuv": 10},
            r"rated_output_dbuv 10 is not possible",
        ),
    ],
)
def test_impossible_amplifier_is_refused(values, message):
    with pytest.raises(ChainError, match=message):
        MastheadAmplifier(id="m", name="amp", **values)


@pytest.mark.parametrize(
    ("values", "message"),
    [
        ({"ports": 1}, r'splitter "s": ports 1 is not possible: use 2 to 64 ports'),
        ({"ports": 5}, r"there is no table loss for 5 ports: use 2, 3, 4, 6, 8, or state loss_db"),
        ({"ports": 4, "loss_db": 3}, r"loss_db 3 is not possible: use 6.02 to 40 dB to each port"),
    ],
)
def test_impossible_splitter_is_refused(values, message):
    with pytest.raises(ChainError, match=message):
        Splitter(id="s", name="s", **values)


def test_splitter_with_too_few_ports_says_so():
    with pytest.raises(ChainError, match=r'splitter "splitter": has 4 ports and feeds 5 outlets: use a larger one'):
        split(4, 5)
    assert split(4, 4).outlet_names == ("Room 0", "Room 1", "Room 2", "Room 3")


@pytest.mark.parametrize(
    ("parts", "message"),
    [
        ((), r'chain "mine": does not begin with an aerial: make an aerial its first part'),
        ((FEEDER, OUTLET, SET), r"does not begin with an aerial"),
        ((AERIAL, FEEDER, OUTLET), r"does not end with a receiver: make a receiver its last part"),
        ((AERIAL, FEEDER, SET), r"has no outlet: add an outlet before the receiver"),
        ((AERIAL, OUTLET, FEEDER, SET), r'feeder "downlead": leads to no outlet: put an outlet after it'),
        (
            (AERIAL, OUTLET, SECOND, SET),
            r"feeds 2 outlets without a splitter: add one before the first outlet",
        ),
        ((AERIAL, FEEDER, FEEDER, OUTLET, SET), r'feeder "downlead": id "f" appears twice'),
        (
            (AERIAL, dataclasses.replace(AERIAL, id="b"), OUTLET, SET),
            r'aerial "Yagi": feeds nothing: put a combiner or a switch after it, or keep one aerial only',
        ),
        (
            (AERIAL, Splitter(id="s", name="s", ports=2), OUTLET, dataclasses.replace(OUTLET, id="p"), SET),
            r'has two outlets named "Kitchen": name each by its room',
        ),
        (
            (AERIAL, OUTLET, Splitter(id="s", name="s", ports=2), SECOND, SET),
            r'splitter "s": stands behind an outlet: put it before the first outlet',
        ),
    ],
)
def test_chain_in_an_order_that_no_signal_can_pass_is_refused(parts, message):
    with pytest.raises(ChainError, match=message):
        chain(*parts)


@pytest.mark.parametrize(
    ("frame", "message"),
    [
        ({"pointing_deg": 400}, r"pointing_deg 400 is not possible: use 0 to 360 degrees from true north"),
        ({"polarisation": "mixed"}, r'polarisation "mixed" is not known'),
        ({"labour_price": -1}, r"labour_price -1 is not possible"),
        ({"currency": ""}, r'chain "mine" has no currency: give one such as EUR'),
    ],
)
def test_impossible_frame_is_refused(frame, message):
    with pytest.raises(ChainError, match=message):
        chain(AERIAL, OUTLET, SET, **frame)


def test_nameless_chain_is_refused():
    with pytest.raises(ChainError, match="the chain has no name"):
        Chain(" ", (AERIAL, OUTLET, SET))


def test_price_is_parts_labour_and_visit():
    whole = chain(AERIAL, FEEDER, OUTLET, SET)
    assert (whole.parts_price, whole.labour_price, whole.visit_price, whole.price) == (54, 20, 30, 104)


def test_missing_price_leaves_the_sum_unknown():
    free = dataclasses.replace(FEEDER, price=None)
    assert chain(AERIAL, free, OUTLET, SET).price is None
    assert chain(AERIAL, FEEDER, OUTLET, SET, labour_price=None).price is None
    assert chain(AERIAL, FEEDER, OUTLET, SET, visit_price=None).price is None


def test_what_is_already_up_costs_nothing():
    free = dataclasses.replace(FEEDER, price=None)
    assert chain(AERIAL, free, OUTLET, SET, already_up=True).price == 0


def test_run_to_an_outlet_passes_the_trunk_and_its_own_branch():
    drops = [Feeder(id=f"d{i}", name=f"drop {i}", cable="copper-5mm", length_m=5) for i in (1, 2)]
    tree = chain(AERIAL, FEEDER, Splitter(id="s", name="s", ports=2), drops[0], OUTLET, drops[1], SECOND, SET)
    assert [part.id for part in tree.run_to("Kitchen")] == ["f", "s", "d1", "o"]
    assert [part.id for part in tree.run_to("Attic")] == ["f", "s", "d2", "o2"]
    assert tree.part_ids_of_feeders == ("f", "d1", "d2")
    with pytest.raises(ChainError, match='has no outlet "Cellar": use one of Kitchen, Attic'):
        tree.run_to("Cellar")


def test_demo_chains_are_priced_and_rise_in_price():
    prices = [demo.price for demo in demo_chains()]
    assert None not in prices
    assert prices == sorted(prices)
    assert [demo.name for demo in demo_chains()] == [
        "loft-dipole",
        "roof-yagi",
        "high-gain",
        "high-gain-masthead",
    ]


def test_demo_chains_share_what_one_roof_would_keep():
    roof_yagi, high_gain, with_amplifier = (
        {part.id for part in demo.parts} for demo in demo_chains() if demo.aerial.place == "roof"
    )
    assert "roof-feeder" in roof_yagi & high_gain & with_amplifier
    assert with_amplifier - high_gain == {"masthead-amplifier"}
    for one in demo_chains():  # the same id never means two different things
        for other in demo_chains():
            for part in one.parts:
                assert all(part == twin for twin in other.parts if twin.id == part.id)


def test_chain_without_end_is_refused_before_it_is_kept():
    feeders = [Feeder(id=f"f{k}", name=f"F{k}", cable="old-solid", length_m=1000) for k in range(20)]
    with pytest.raises(ChainError, match=r"has 20000 m of feeder on the way to .*: use at most 2000 m"):
        Chain("long", (AERIAL, *feeders, Outlet(id="o", name="Room"), Receiver(id="r", name="Set")))
    short = [Feeder(id=f"f{k}", name=f"F{k}", cable="old-solid", length_m=0.1) for k in range(500)]
    with pytest.raises(ChainError, match="has 503 parts: use at most 400"):
        Chain("many", (AERIAL, *short, Outlet(id="o", name="Room"), Receiver(id="r", name="Set")))


def test_no_chain_takes_the_word_for_no_aerial():
    with pytest.raises(ChainError, match="the word means that no aerial is up"):
        Chain("Nothing", (AERIAL, Outlet(id="o", name="Room"), Receiver(id="r", name="Set")))
