import numpy as np
import pytest
import scipy.stats

from analytics.distribution import distribution_fit
from analytics.goodness import (
    CHUNK,
    LAPLACE_POINTS,
    edf_distances,
    goodness_chunk,
    goodness_of_fit,
    goodness_plan,
    goodness_result,
    laplace_bracket,
)
from tests.references.plain_reading import plain_edf


def test_distances_are_those_of_the_loop():
    rng = np.random.default_rng(1)
    rows = np.sort(rng.uniform(size=(4, 37)), axis=1)
    found = edf_distances(rows)
    names = ("anderson_darling", "cramer_von_mises", "watson", "kolmogorov", "kuiper")
    for i, row in enumerate(rows):
        got = [float(getattr(found, name)[i]) for name in names]
        np.testing.assert_allclose(got, plain_edf(row), rtol=1e-10)


def test_distances_are_scipys():
    u = np.sort(np.random.default_rng(2).uniform(size=50))
    found = edf_distances(u)
    uniform = scipy.stats.uniform
    assert found.cramer_von_mises[0] == pytest.approx(
        scipy.stats.cramervonmises(u, uniform.cdf).statistic, rel=1e-12
    )
    assert found.kolmogorov[0] == pytest.approx(
        np.sqrt(50) * scipy.stats.kstest(u, uniform.cdf).statistic, rel=1e-12
    )


def test_distances_see_neither_location_nor_scale():
    values = np.random.default_rng(3).laplace(size=99)
    for family in ("laplace", "normal"):
        one, other = (
            edf_distances(distribution_fit(v, family).cdf(np.sort(v))).anderson_darling[0]
            for v in (values, 12 * values + 5)
        )
        assert one == pytest.approx(other, rel=1e-9)


def test_same_seed_same_p_in_any_order_of_chunks():
    values = np.random.default_rng(4).laplace(size=120)
    plan = goodness_plan(values, family="laplace", draws=CHUNK * 2 + 7, seed=5)
    assert plan.chunks == 3
    backwards = {i: goodness_chunk(plan, i) for i in (2, 0, 1)}
    one = goodness_result(plan, [backwards[i] for i in range(3)])
    other = goodness_of_fit(values, family="laplace", draws=CHUNK * 2 + 7, seed=5)
    assert one.p_anderson_darling == other.p_anderson_darling
    assert one.parameters.shape == (2, CHUNK * 2 + 7)
    third = goodness_of_fit(values, family="laplace", draws=CHUNK * 2 + 7, seed=6)
    assert not np.array_equal(third.parameters, one.parameters)


def test_p_is_the_share_of_draws_at_least_as_far_counting_the_data():
    values = np.random.default_rng(4).exponential(size=200)
    found = goodness_of_fit(values, family="normal", draws=99)
    assert found.p_anderson_darling == 0.01  # (0 + 1) / (99 + 1)


DRAWN = {
    "laplace": lambda rng: rng.laplace(size=200),
    "normal": lambda rng: rng.normal(size=200),
    "student_t": lambda rng: rng.standard_t(4, size=200),
    "asymmetric_laplace": lambda rng: scipy.stats.laplace_asymmetric(0.5).rvs(
        200, random_state=rng
    ),
}


@pytest.mark.parametrize("family", DRAWN)
def test_samples_of_the_family_are_rarely_refused_and_others_always(family):
    p = [
        goodness_of_fit(
            DRAWN[family](np.random.default_rng(seed)), family=family, draws=99, seed=seed
        ).p_anderson_darling
        for seed in range(12)
    ]
    assert sum(each <= 0.05 for each in p) <= 3  # expected 0.6; four or more once in 400 times
    assert 0.25 < np.mean(p) < 0.75
    rng = np.random.default_rng(9)
    wrong = np.concatenate([rng.normal(-4, 1, 150), rng.normal(4, 1, 150)])
    rng.shuffle(wrong)
    assert goodness_of_fit(wrong, family=family, draws=199).p_anderson_darling <= 0.01


def test_dependence_is_found_and_widens_what_chance_may_do():
    rng = np.random.default_rng(11)
    z = np.zeros(600)
    for t in range(1, 600):
        z[t] = 0.9 * z[t - 1] + rng.standard_normal()
    values = scipy.stats.laplace.ppf(scipy.stats.norm.cdf(z * np.sqrt(1 - 0.81)))
    dependent = goodness_of_fit(values, family="laplace", draws=399)
    independent = goodness_of_fit(values, family="laplace", draws=399, dependent=False)
    assert dependent.order >= 1
    assert independent.order == 0
    assert dependent.anderson_darling == independent.anderson_darling
    assert dependent.p_anderson_darling > independent.p_anderson_darling
    assert dependent.parameters[0].std() > 2 * independent.parameters[0].std()


def test_ties_are_counted():
    values = np.round(np.random.default_rng(1).laplace(size=200), 1)
    assert goodness_of_fit(values, family="laplace", draws=49).ties > 0.5


@pytest.mark.parametrize(
    ("statistic", "n", "between"),
    [
        (0.30, 500, (0.5, 1.0)),
        (0.983, 500, (0.025, 0.05)),
        (2.0, 500, (0.0, 0.01)),
        (0.9, 50, None),
    ],
)
def test_bracket_of_the_published_table(statistic, n, between):
    assert laplace_bracket(statistic, n, name="anderson_darling") == between


def test_the_tables_rise():
    for table in LAPLACE_POINTS.values():
        for row in table.values():
            assert list(row) == sorted(row)


@pytest.mark.parametrize(
    ("call", "match"),
    [
        (lambda: goodness_plan(np.arange(9.0), family="laplace"), "20 values"),
        (lambda: goodness_plan(np.ones(50), family="laplace"), "must vary"),
        (lambda: goodness_plan(np.arange(50.0), family="laplace", draws=0), "draws must be 1"),
        (lambda: goodness_plan(np.arange(50.0), family="gumbel"), "family must be one of"),
        (lambda: laplace_bracket(1.0, 500, name="kolmogorov"), "name must be one of"),
    ],
)
def test_refusals(call, match):
    with pytest.raises(ValueError, match=match):
        call()
