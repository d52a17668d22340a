"""Readings against the textbook's formula, long samplings and importance sampling."""

import numpy as np
import pytest
from scipy.special import ndtr

from app.chance import DRAWS, Cells, ErrorPart, Loadings, PathError
from app.conditioning import Bound, Joint, Plain, condition, match, surprise


def three_emissions(known=None):
    """Two emissions of one mast and one of another: roof 2 dB, masts 4 dB, each emission 3 dB."""
    path = PathError(("a", "a", "b"), np.array([10.0, 10.0, 200.0]), np.full(3, 4.0), 0.0, 20.0)
    parts = (
        ErrorPart(("roof",) * 3, np.full(3, 2.0)),
        ErrorPart(("emission:1", "emission:2", "emission:3"), np.full(3, 3.0)),
    )
    return Cells(np.array([2.0, -1.0, 0.0]), path, parts, known)


def rows(loadings, *which):
    return Loadings(loadings.keys, loadings.db[list(which)])


def test_conditioning_is_the_textbook_formula_on_three_emissions_by_hand():
    """The first emission is read 9 dB above its prediction, with an error of variance 7.

    Covariance: 4 + 16 + 9 = 29 on the diagonal, 4 + 16 = 20 on one mast, 4 between masts. 29 + 7 = 36, so the means
    move by 29 · 9/36 = 7.25, 20 · 9/36 = 5, 4 · 9/36 = 1, and the variances become 29 − 29²/36 = 5.6389,
    29 − 20²/36 = 17.8889 and 29 − 4²/36 = 28.5556.
    """
    posterior = condition(rows(three_emissions().loadings(), 0), [Plain(0, 9.0, np.sqrt(7))])
    after = three_emissions(posterior)
    assert after.mean_db - after.median_db == pytest.approx([7.25, 5.0, 1.0], abs=1e-9)
    assert after.sigma_db**2 == pytest.approx([29 - 29**2 / 36, 29 - 20**2 / 36, 29 - 16 / 36], abs=1e-9)
    assert after.chance == pytest.approx(ndtr(np.array([9.25, 4.0, 1.0]) / after.sigma_db))


def test_samples_have_the_moments_of_the_formula():
    posterior = condition(rows(three_emissions().loadings(), 0), [Plain(0, 9.0, np.sqrt(7))])
    after = three_emissions(posterior)
    drawn = after.draws()
    assert drawn.mean(axis=0) == pytest.approx(after.mean_db, abs=3 * 5.4 / np.sqrt(DRAWS))
    assert drawn.std(axis=0) == pytest.approx(after.sigma_db, rel=0.05)
    assert posterior.is_normal
    assert posterior.picked is None


def test_two_readings_equal_the_formula_in_matrices():
    """mean = C A'(A C A' + R)^-1 y, covariance = C − C A'(A C A' + R)^-1 A C, with numpy's solver."""
    loadings = three_emissions().loadings()
    covariance = loadings.db @ loadings.db.T
    pick, noise, value = [0, 2], np.diag([4.0, 2.25]), np.array([-6.0, 3.0])
    gain = covariance[:, pick] @ np.linalg.inv(covariance[np.ix_(pick, pick)] + noise)
    posterior = condition(rows(loadings, *pick), [Plain(0, -6.0, 2.0), Plain(1, 3.0, 1.5)])
    shift, variance = posterior.moments(loadings)
    assert shift == pytest.approx(gain @ value)
    assert variance == pytest.approx(np.diag(covariance - gain @ covariance[pick]))


def test_order_of_readings_does_not_matter():
    loadings = three_emissions().loadings()
    sites = [Plain(0, 3.0, 2.0), Bound(1, 0.0, np.inf, 1.0), Plain(1, -2.0, 3.0)]
    first = condition(rows(loadings, 0, 1), sites)
    second = condition(rows(loadings, 0, 1), sites[::-1])
    assert first.moments(loadings)[0] == pytest.approx(second.moments(loadings)[0], abs=1e-4)


def test_a_reading_without_end_of_error_says_nothing():
    loadings = three_emissions().loadings()
    shift, variance = condition(rows(loadings, 0), [Plain(0, 9.0, 1e6)]).moments(loadings)
    assert shift == pytest.approx(np.zeros(3), abs=1e-6)
    assert variance == pytest.approx(np.full(3, 29.0))


def random_emissions(count, seed):
    """Emissions on a few masts with everything in common that the model knows."""
    rng = np.random.default_rng(seed)
    masts = tuple(f"m{e % 4}" for e in range(count))
    bearing = np.array([(40.0 * (e % 4)) % 360 for e in range(count)])
    path = PathError(masts, bearing, np.array([3.0, 5.0, 7.0, 8.0])[np.arange(count) % 4], 0.5, 20.0)
    parts = (
        ErrorPart(("roof",) * count, np.full(count, 2.0)),
        ErrorPart(tuple(f"emission:{e}" for e in range(count)), np.full(count, 2.5)),
        ErrorPart(("aerial:a",) * count, np.full(count, 1.5)),
    )
    return Cells(rng.normal(0, 4, count), path, parts)


def long_sampling(cells, log_likelihood, count, seed=11):
    """Weighted samples of the prior: the posterior by brute force, with effective number."""
    loadings = cells.loadings()
    covariance = loadings.db @ loadings.db.T
    f = np.random.default_rng(seed).multivariate_normal(np.zeros(len(covariance)), covariance, count)
    weight = np.exp(log_likelihood(f))
    weight /= weight.sum()
    return f, weight, 1 / (weight**2).sum()


def log_of(site, f):
    x = f[:, site.row]
    if isinstance(site, Plain):
        return -(((site.value_db - x) / site.sd_db) ** 2) / 2
    inside = ndtr((x - site.low_db) / site.softness_db) - ndtr((x - site.high_db) / site.softness_db)
    return np.log(np.maximum(site.wrong + (1 - site.wrong) * inside, 1e-12))


@pytest.mark.parametrize("count", [5, 20])
def test_bounds_equal_a_long_sampling(count):
    """5 emissions under bounds alone, 20 under bounds and levels mixed; brute force with 400,000 samples.

    Tolerances: three standard errors of both samplings for chances; the moment-matched mean within 0.15 dB of a
    spread of 5 dB and more.
    """
    cells = random_emissions(count, count)
    m = cells.median_db
    sites = [
        Bound(0, 1.5 - m[0], np.inf, 1.0),
        Bound(1, -np.inf, -1.5 - m[1], 1.0),
        Bound(2, -1.5 - m[2], 1.5 - m[2], 1.0),
        Bound(3, 1.5 - m[3], np.inf, 6.0, 0.3),
        Bound(4, 0.0, np.inf, 3.0, 0.1),
    ]
    if count == 20:
        sites += [Plain(9, 4.0, 3.0), Plain(14, -5.0, 3.0), Plain(9, 2.5, 4.0), Bound(17, -np.inf, 2.0, 1.8)]
    posterior = condition(cells.loadings(), sites)
    assert posterior.effective_share > 0.4
    f, weight, effective = long_sampling(cells, lambda f: sum(log_of(site, f) for site in sites), 400_000)
    after = Cells(cells.median_db, cells.path, cells.parts, posterior)
    expected = weight @ (f + m >= 0)
    error = np.sqrt(expected * (1 - expected) * (1 / effective + 1 / (posterior.effective_share * DRAWS)))
    assert (np.abs(after.chance - expected) < 3.5 * error + 1e-3).all()
    assert after.mean_db == pytest.approx(weight @ (f + m), abs=0.15 + 3 * 8 / np.sqrt(effective))


def test_a_bound_alone_has_the_moments_of_the_truncated_normal():
    """Half of N(0, 1): mean sqrt(2/pi) = 0.7979, variance 1 − 2/pi = 0.3634 (any handbook); softness near 0."""
    matched = match(np.array([[1.0]]), [Bound(0, 0.0, np.inf, 1e-4)])
    assert matched.mean_db[0] == pytest.approx(np.sqrt(2 / np.pi), abs=1e-4)
    assert matched.covariance[0, 0] == pytest.approx(1 - 2 / np.pi, abs=1e-4)


def test_a_statement_on_several_is_weighed_by_the_samples():
    """At least one of two independent N(0, 1) is above 0: then the first is so with chance 0.5/0.75 = 2/3."""
    loadings = Loadings(("x", "y"), np.eye(2))

    def above(f):
        return np.log(np.maximum((f > 0).any(axis=1), 1e-12))

    posterior = condition(loadings, [], [Joint((0, 1), above, Bound(0, 0.0, np.inf, 0.1, 0.3))])
    moved = posterior.applied(np.stack([_normal("x"), _normal("y")], axis=1), loadings)
    assert (moved[:, 0] > 0).mean() == pytest.approx(2 / 3, abs=3 * 0.5 / np.sqrt(posterior.effective_share * DRAWS))
    assert (moved[:, 1] > 0).mean() == pytest.approx(2 / 3, abs=0.03)


def _normal(key):
    from app.chance import normals

    return normals(key)


def test_hundreds_of_bounds_settle_and_keep_finite():
    cells = random_emissions(20, 3)
    sites = [Bound(k % 20, 0.0, np.inf, 1.0) for k in range(2000)]
    posterior = condition(cells.loadings(), sites)
    assert np.isfinite(posterior.mean).all()
    assert (posterior.moments(cells.loadings())[1] > 0).all()


def test_a_wider_prior_lets_a_part_move_by_what_it_was_read():
    """Run of sd 1, prior widened to 6: read −10 ± 1 dB alone it moves by −10 · 36/37."""
    loadings = Loadings(("run",), np.array([[1.0]]))
    posterior = condition(loadings, [Plain(0, -10.0, 1.0)], wide={"run": 6.0})
    assert posterior.of("run") == pytest.approx((-10 * 36 / 37, 6 / np.sqrt(37)))
    drawn = posterior.applied(_normal("run")[:, None], loadings)
    assert drawn.mean() == pytest.approx(-10 * 36 / 37, abs=0.1)
    assert drawn.std() == pytest.approx(6 / np.sqrt(37), rel=0.05)


def test_surprise_counts_standard_deviations_and_tails():
    assert surprise(Plain(0, 10.0, 3.0), 0.0, 16.0) == pytest.approx(2.0)
    assert surprise(Bound(0, 21.0, np.inf, 3.0), 0.0, 16.0) > 3.5  # 4.2 standard deviations
    assert surprise(Bound(0, 17.0, np.inf, 3.0), 0.0, 16.0) < 3.5  # 3.4
