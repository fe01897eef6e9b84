import numpy as np
import pytest
import scipy.stats
from scipy.integrate import quad

from analytics.distribution import FEWEST, distribution_fit, kernel_fit, sample
from analytics.families import FAMILIES

SCIPY = {
    "laplace": lambda p: scipy.stats.laplace(p["location"], p["scale"]),
    "asymmetric_laplace": lambda p: scipy.stats.laplace_asymmetric(
        p["skew"], p["location"], p["scale"]
    ),
    "normal": lambda p: scipy.stats.norm(p["location"], p["scale"]),
    "student_t": lambda p: scipy.stats.t(p["df"], p["location"], p["scale"]),
}


def data(seed=1, n=300):
    return np.random.default_rng(seed).laplace(0.3, 0.2, n) + np.random.default_rng(
        seed + 1
    ).exponential(0.1, n)


@pytest.mark.parametrize("family", FAMILIES)
@pytest.mark.parametrize("n", [200, 201])
def test_functions_are_scipys_at_the_fitted_parameters(family, n):
    fit = distribution_fit(data(n=n), family)
    judge = SCIPY[family](fit.parameters)
    at = np.linspace(-2.0, 3.0, 101)
    np.testing.assert_allclose(fit.density(at), judge.pdf(at), rtol=1e-9, atol=1e-300)
    np.testing.assert_allclose(fit.cdf(at), judge.cdf(at), rtol=1e-9, atol=1e-15)
    shares = np.linspace(0.001, 0.999, 99)
    np.testing.assert_allclose(fit.quantile(shares), judge.ppf(shares), rtol=1e-8, atol=1e-12)
    assert fit.loglik == pytest.approx(judge.logpdf(data(n=n)).sum(), abs=1e-8)


@pytest.mark.parametrize("family", FAMILIES)
@pytest.mark.parametrize("seed", [1, 2, 3])
def test_no_fit_of_scipys_is_more_likely(family, seed):
    values = data(seed)
    own = distribution_fit(values, family)
    fitter = {
        "laplace": scipy.stats.laplace,
        "asymmetric_laplace": scipy.stats.laplace_asymmetric,
        "normal": scipy.stats.norm,
        "student_t": scipy.stats.t,
    }[family]
    other = fitter.fit(values)
    assert own.loglik >= fitter.logpdf(values, *other).sum() - 1e-4


@pytest.mark.parametrize("df", [1.3, 3.0, 8.0])
def test_student_t_finds_heavy_tails(df):
    values = np.random.default_rng(8).standard_t(df, 400) * 2 + 1
    own = distribution_fit(values, "student_t")
    judge = scipy.stats.t.fit(values)
    assert own.loglik == pytest.approx(scipy.stats.t.logpdf(values, *judge).sum(), abs=1e-3)
    assert own.parameters["df"] == pytest.approx(judge[0], rel=0.02)


def test_planted_parameters_come_back():
    values = scipy.stats.laplace_asymmetric(0.6, 1.0, 2.0).rvs(
        20000, random_state=np.random.default_rng(3)
    )
    found = distribution_fit(values, "asymmetric_laplace").parameters
    assert found["skew"] == pytest.approx(0.6, abs=0.02)
    assert found["location"] == pytest.approx(1.0, abs=0.1)
    assert found["scale"] == pytest.approx(2.0, abs=0.06)


@pytest.mark.parametrize("family", FAMILIES)
def test_many_rows_are_fitted_as_each_by_itself(family):
    rows = np.sort(np.random.default_rng(6).laplace(size=(5, 150)), axis=1)
    together = FAMILIES[family].estimate(rows)
    for i, row in enumerate(rows):
        alone = distribution_fit(row, family)
        judged = FAMILIES[family].log_density(row[None], *together[:, i : i + 1, None]).sum()
        # The many of a bootstrap are fitted less far: a hundredth of a unit of log-likelihood.
        assert judged == pytest.approx(alone.loglik, abs=0.02)


@pytest.mark.parametrize("family", FAMILIES)
def test_moving_and_scaling_the_values_moves_and_scales_the_fit(family):
    values = data()
    plain, moved = distribution_fit(values, family), distribution_fit(3 * values - 7, family)
    assert moved.parameters["location"] == pytest.approx(
        3 * plain.parameters["location"] - 7, abs=1e-3
    )
    assert moved.parameters["scale"] == pytest.approx(3 * plain.parameters["scale"], rel=1e-3)
    assert moved.loglik == pytest.approx(plain.loglik - values.size * np.log(3), abs=1e-3)


def test_criteria_count_parameters():
    fit = distribution_fit(data(n=100), "laplace")
    assert fit.aic == pytest.approx(4 - 2 * fit.loglik)
    assert fit.bic == pytest.approx(2 * np.log(100) - 2 * fit.loglik)


def test_kernel_is_scipys_with_the_same_bandwidth():
    values = data(n=80)
    found = kernel_fit(values)
    judge = scipy.stats.gaussian_kde(values, found.bandwidth / values.std(ddof=1))
    at = np.linspace(-1, 2, 41)
    np.testing.assert_allclose(found.density(at), judge(at), rtol=1e-10)
    assert quad(found.density, -5, 8)[0] == pytest.approx(1.0, abs=1e-6)
    assert found.cdf(0.4) == pytest.approx(quad(found.density, -5, 0.4)[0], abs=1e-6)


def test_kernel_leaves_each_value_out_of_its_own_estimate():
    values = np.sort(data(n=40))
    found = kernel_fit(values)
    slow = 0.0
    for i in range(40):
        rest = np.delete(values, i)
        slow += np.log(scipy.stats.norm.pdf(values[i], rest, found.bandwidth).mean())
    assert found.loglik == pytest.approx(slow, abs=1e-9)


@pytest.mark.parametrize(
    ("values", "match"),
    [
        (np.arange(FEWEST - 1.0), "20 values"),
        (np.full(40, 2.0), "all 40 are 2"),
        (np.append(np.arange(30.0), np.inf), "infinite"),
    ],
)
def test_refusals(values, match):
    with pytest.raises(ValueError, match=match):
        sample(values)


def test_an_unknown_family_is_refused():
    with pytest.raises(ValueError, match="family must be one of laplace"):
        distribution_fit(data(), "cauchy")
