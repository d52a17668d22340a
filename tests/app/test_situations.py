"""Sixteen roofs whose answer was reasoned before the code ran.

All margins are medians in dB at the deciding outlet; errors: roof 2 dB, mast 5 dB, emission 2.5 dB, aerial 1.5 dB, run
1 dB: a spread of 6.2 dB for each margin, of which all but the aerial's 1.5 dB (2.1 dB between two aerials) is shared by
what is up and what may come. One more multiplex is worth 50, a reading costs 10, unless said otherwise.
"""

from dataclasses import dataclass, replace

import numpy as np
import pytest

from app.chain.parts import Aerial, Chain, Feeder, Outlet, Receiver
from app.chance import DRAWS, Cells, ErrorPart, PathError, received
from app.conditioning import Plain, condition
from app.reading_value import Readable
from app.verdict import Outcome, compare, nothing, wanted_multiplexes

FREE_LEVEL_DBUV = 40.0  # level at a margin of 0, so that a reading shows 40 + margin + errors


def chain_of(name, price, aerial="small"):
    return Chain(
        name=name,
        parts=(
            Aerial(id=aerial, name=aerial, price=price, gain_dbd=((470, 8), (694, 9)), beamwidth_deg=40,
                   front_to_back_db=20),
            Feeder(id="run", name="Run", price=0, cable="copper-7mm", length_m=10),
            Outlet(id="outlet", name="Room", price=0),
            Receiver(id="set", name="Set"),
        ),
        labour_price=0,
        visit_price=0,
    )  # fmt: skip


@dataclass(frozen=True)
class Side:
    """One chain on the roof: the median margin of each emission."""

    name: str
    margins: tuple[float, ...]
    aerial: str = "small"
    price: float = 0.0
    limits: tuple[str, ...] = ()


def cells(side, masts, emissions, known=None):
    count = len(side.margins)

    def same(key, sd):
        return ErrorPart((key,) * count, np.full(count, sd))

    bearing = np.array([float((sum(map(ord, mast)) * 47) % 360) for mast in masts])
    parts = (
        same("roof", 2.0),
        ErrorPart(tuple(f"emission:{one}" for one in emissions), np.full(count, 2.5)),
        same(f"aerial:{side.aerial}", 1.5),
        same("feeder:run", 1.0),
    )
    return Cells(
        np.array(side.margins, dtype=float),
        PathError(tuple(masts), bearing, np.full(count, 5.0), 0.5, 20.0),
        parts,
        known,
    )


def decide(
    now, idea, owners=None, masts=None, worth=50.0, cost=10.0, up=True, known=None, more=(), read=True, wanted=None
):
    """Verdict on `idea` against `now` (None: nothing is up)."""
    count = len(idea.margins)
    owners = owners or tuple(f"mux-{e}" for e in range(count))
    masts = masts or ("far",) * count
    emissions = tuple(f"e{e}" for e in range(count))
    multiplexes = sorted(set(owners))

    def outcome(side):
        one = cells(side, masts, emissions, known)
        got = received(one.draws(), owners, multiplexes)
        limits = side.limits or ("noise",) * len(multiplexes)
        chain = chain_of(side.name, side.price, side.aerial)
        return Outcome(side.name, chain, got, got.mean(axis=0), limits)

    baseline = nothing(len(multiplexes)) if now is None else outcome(now)
    candidate = outcome(idea)
    others = [candidate, *(outcome(one) for one in more), *([] if now is None else [baseline])]
    wanted = wanted or wanted_multiplexes(multiplexes, [baseline, *others])
    levels = cells(now or idea, masts, emissions, known).draws() + FREE_LEVEL_DBUV
    readables = [Readable(emissions[e], 90.0, levels[:, e], 2.5) for e in range(count)] if read else []
    return compare(candidate, baseline, others, multiplexes, wanted, worth, up, readables, cost)


def test_noise_limited_gain_is_worth_it():
    """Four multiplexes 10 dB short today are 10 dB good with 20 dB more: chance 5 % before, 95 % after.

    Extra is about 4 · 0.9 = 3.6, worth 180, price 60: U ≈ +120. A reading could only avert the few cases in which
    the field is so high or so low that nothing changes: little to gain, so buy.
    """
    found = decide(Side("now", (-10,) * 4), Side("idea", (10,) * 4, "large", 60))
    assert found.answer == "worth it"
    assert found.expected_extra == pytest.approx(3.6, abs=0.15)
    assert found.gained == ("mux-0", "mux-1", "mux-2", "mux-3")
    assert found.reason.startswith("4 multiplexes are in question, not likely today: 4 held back by noise (gain helps)")


def test_interference_that_directivity_helps_is_worth_it():
    """A co-channel transmitter at 140° leaves C/(N+I) 10 dB short; the narrow beam takes 20 dB off it: +10 dB."""
    limits = ("interference",) * 2
    found = decide(Side("now", (-10, -10), limits=limits), Side("narrow", (10, 10), "long", 40))
    assert found.answer == "worth it"
    assert "2 held back by interference (directivity cures it, gain or an amplifier alone does little)" in found.reason


def test_interference_that_an_amplifier_cannot_help_is_not():
    """An amplifier lifts wanted and unwanted alike: the margin stays at −10 dB and nothing is gained."""
    limits = ("interference",) * 2
    found = decide(
        Side("now", (-10, -10), limits=limits), Side("amplified", (-10, -10), price=60, limits=limits), wanted=["mux-0"]
    )
    assert (found.answer, found.expected_extra, found.chance_of_gain) == ("not worth it", 0, 0)
    assert found.measure_next is None


def test_overload_by_a_strong_local_is_made_worse_by_gain():
    """The local overloads the amplifier: what was 8 dB good (90 %) falls 20 dB short. Lost, and paid for."""
    found = decide(Side("now", (8, 8)), Side("amplified", (-20, -20), price=60, limits=("overload",) * 2))
    assert (found.answer, found.gained) == ("not worth it", ())
    assert found.lost == ("mux-0", "mux-1")
    assert found.expected_extra == pytest.approx(-1.8, abs=0.1)


def test_everything_secure_already_leaves_nothing_to_buy():
    """25 dB good is four spreads: secure with both, so nothing is wanted and nothing worth reading."""
    found = decide(Side("now", (25,) * 3), Side("idea", (35,) * 3, "large", 60))
    assert (found.answer, found.wanted, found.expected_extra) == ("not worth it", (), 0)
    assert found.measure_next is None


def test_hopeless_stays_hopeless():
    """45 dB short even with the large aerial: chance 0, not wanted."""
    found = decide(Side("now", (-60,) * 3), Side("idea", (-45,) * 3, "large", 60))
    assert (found.answer, found.wanted, found.break_even_price) == ("not worth it", (), 0)


def test_a_coin_toss_is_to_be_measured_first():
    """One mast, four multiplexes: today 15 dB short, with the idea 0 dB: chance 50 %, all four together or none.

    Extra is 2, worth 100, price 100: U averages 0 and is +100 or −100. Knowing would earn about half of that; a
    reading with an error of 2.5 dB against a spread of 5.7 dB tells most of it, far more than its cost of 10.
    """
    found = decide(Side("now", (-15,) * 4), Side("idea", (0,) * 4, "large", 100))
    assert found.answer == "measure first"
    assert 20 < found.measure_next.value < 50
    words = [part.answer for part in found.measure_next.tipping]
    assert words == ["not worth it", "worth it"]
    # U turns where half of the four come: a margin of 0 with the idea, 15 dB less through what is up: 40 − 15 = 25.
    assert found.measure_next.tipping[0].to_dbuv == pytest.approx(25, abs=2)
    assert [part.why for part in found.measure_next.tipping] == ["out of reach", "the candidate brings them"]


def test_a_reading_that_costs_more_than_it_is_worth_is_not_taken():
    """The same coin toss where a reading costs 60: more than perfect knowledge (about 50) could earn."""
    found = decide(Side("now", (-15,) * 4), Side("idea", (0.2,) * 4, "large", 100), cost=60)
    assert found.answer in ("worth it", "not worth it")
    assert found.measure_next.value < 60


def test_works_already_is_among_the_intervals():
    """Today 0 dB, with the idea 10 dB: below nothing helps, between the idea brings four, above they are there."""
    found = decide(Side("now", (-3,) * 4), Side("idea", (7,) * 4, "large", 100))
    whys = [part.why for part in found.measure_next.tipping]
    assert whys == ["out of reach", "the candidate brings them", "works already"]
    assert found.measure_next.tipping[0].from_dbuv is None
    assert found.measure_next.tipping[-1].to_dbuv is None


def test_one_gained_one_lost_is_not_worth_its_price():
    """Turned to another mast: one from 10 dB short to 10 dB good, one the other way. Extra 0, price 30."""
    found = decide(Side("now", (10, -10)), Side("turned", (-10, 10), "long", 30), masts=("a", "z"))
    assert (found.gained, found.lost) == (("mux-1",), ("mux-0",))
    assert found.expected_extra == pytest.approx(0, abs=0.1)
    assert found.answer == "not worth it"


def test_losing_one_of_two_copies_costs_nothing():
    """Both masts carry the multiplex 25 dB good; the idea loses the second copy and nothing else."""
    found = decide(
        Side("now", (25, 25, -10)),
        Side("idea", (25, -30, 10), "long", 20),
        owners=("m", "m", "n"),
        masts=("a", "z", "a"),
    )
    assert (found.lost, found.gained, found.answer) == ((), ("n",), "worth it")


def test_a_higher_price_and_no_gain():
    """The same margins through another aerial for 80: errors of the aerials differ, their mean does not."""
    found = decide(Side("now", (-2, 3)), Side("dear", (-2, 3), "other", 80))
    assert found.answer == "not worth it"
    assert found.expected_extra == pytest.approx(0, abs=0.04)
    assert found.price_per_extra is None or found.price_per_extra > 1000


def test_gain_that_is_too_dear():
    """One multiplex from 5 % to 95 %: worth 45, price 90; U = −45, and no reading makes one worth two."""
    found = decide(Side("now", (-10,)), Side("dear", (10,), "large", 90))
    assert found.answer == "not worth it"
    assert found.break_even_price == pytest.approx(45, abs=2)
    assert found.expected_worth == pytest.approx(-45, abs=2)


def test_an_identical_candidate_differs_by_exactly_nothing():
    found = decide(Side("now", (-2, 0, 3)), Side("now", (-2, 0, 3)))
    assert (found.expected_extra, found.chance_of_gain, found.expected_worth, found.price_difference) == (0, 0, 0, 0)
    assert (found.answer, found.measure_next, found.gained, found.lost) == ("not worth it", None, (), ())


@pytest.mark.parametrize(("read_db", "answer"), [(12.0, "worth it"), (-12.0, "not worth it")])
def test_a_reading_flips_the_verdict(read_db, answer):
    """The coin toss after its reading: 12 dB above the prediction moves the margin of +0 to about +9, below to −9.

    Share of the reading's variance that is the field's: (25 + 4 + 6.25 + 2.25 + 1) / (38.5 + 2.5²) = 0.86 for the
    emission read, less for the others: chance about 95 % or 5 %, and nothing is left worth reading at 10.
    """
    now, idea = Side("now", (-15,) * 4), Side("idea", (0,) * 4, "large", 100)
    emissions = tuple(f"e{e}" for e in range(4))
    rows = cells(now, ("far",) * 4, emissions).loadings()
    known = condition(replace(rows, db=rows.db[:2]), [Plain(0, read_db, 2.5), Plain(1, read_db, 2.5)])
    assert decide(now, idea, known=known, wanted=["mux-0", "mux-1", "mux-2", "mux-3"]).answer == answer


def test_nothing_up_there_today_makes_it_pay_in_full():
    """A bare roof, five multiplexes 12 dB good (97 %) for 150: extra 4.9, worth 243."""
    found = decide(None, Side("idea", (12,) * 5, price=150))
    assert (found.answer, found.price_difference) == ("worth it", 150)
    assert found.expected_extra == pytest.approx(5 * 0.974, abs=0.05)


def test_hopeless_multiplexes_of_others_change_nothing():
    """24 emissions of new multiplexes, 40 dB short, on free channels: the same word and, as draws are keyed by name,
    the same figures."""
    now, idea = Side("now", (-3, -6, 2)), Side("idea", (6, 3, 11), "large", 60)
    alone = decide(now, idea, masts=("a", "a", "b"))
    more = decide(
        replace(now, margins=now.margins + (-50.0,) * 24),
        replace(idea, margins=idea.margins + (-40.0,) * 24),
        masts=("a", "a", "b") + ("z",) * 24,
    )
    assert more == alone


def test_the_amplifier_that_harms():
    """Noise figure of the set is not the limit: the amplifier adds 1 dB of noise for 50 and helps nobody."""
    found = decide(Side("now", (1, 1)), Side("amplified", (0, 0), price=50))
    assert found.answer == "not worth it"
    assert found.expected_extra < 0
    assert found.chance_of_gain == 0
    assert found.break_even_price < 0


def test_the_cheapest_equal_chain_is_named():
    """Two ideas with the same margins for 60 and 90."""
    cheap = Side("cheap", (10,) * 2, "large", 60)
    found = decide(Side("now", (-10,) * 2), Side("dear", (10,) * 2, "large", 90), more=(cheap,))
    assert found.cheapest_equal == "cheap"


def test_samples_are_enough():
    found = decide(Side("now", (-3,) * 4), Side("idea", (7,) * 4, "large", 100))
    assert found.expected_extra_error < 0.03
    assert DRAWS <= 10_000
