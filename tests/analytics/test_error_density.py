"""The joint density of intercept and slope: against scipy's bivariate t, and as a density."""

import numpy as np
import pytest
from scipy.stats import multivariate_t

from analytics.error_density import error_density
from analytics.robust import cell_inference


def inference(level=0.95, seed=2):
    rng = np.random.default_rng(seed)
    driver = rng.standard_normal(300)
    return cell_inference(
        driver, 0.5 * np.roll(driver, 4) + rng.standard_normal(300), window=6, shift=4, level=level
    )


def test_density_is_scipys_bivariate_t():
    """scipy.stats.multivariate_t (SciPy) with the covariance as its shape matrix."""
    known = inference()
    found = error_density(known, steps=15)
    grid = np.stack(np.meshgrid(found.intercept, found.slope), axis=-1)
    wanted = multivariate_t(
        loc=known.plane.estimate, shape=known.plane.covariance, df=known.effective_months - 2.0
    ).pdf(grid)
    np.testing.assert_allclose(found.density, wanted, rtol=1e-9)


@pytest.mark.parametrize("level", [0.5, 0.9, 0.95])
def test_the_region_is_the_set_of_highest_density_and_holds_its_level(level):
    known = inference(level)
    found = error_density(known, steps=401, reach=1.2)
    area = (found.intercept[1] - found.intercept[0]) * (found.slope[1] - found.slope[0])
    inside = found.density >= found.level_height
    assert found.density[inside].sum() * area == pytest.approx(level, abs=0.004)
    target = multivariate_t(
        loc=known.plane.estimate, shape=known.plane.covariance, df=found.freedom
    )
    np.testing.assert_allclose(target.pdf(known.plane.robust), found.level_height, rtol=1e-7)


def test_highest_at_the_estimate_and_even_around_it():
    known = inference()
    found = error_density(known, steps=21)
    assert np.unravel_index(found.density.argmax(), (21, 21)) == (10, 10)
    assert found.slope[10] == pytest.approx(known.slope)
    np.testing.assert_allclose(found.density, found.density[::-1, ::-1], rtol=1e-9)


def test_refusals():
    with pytest.raises(ValueError, match="steps must be 2 or more"):
        error_density(inference(), steps=1)
    driver = np.random.default_rng(1).standard_normal(200)
    exact = cell_inference(driver, 2.0 * driver, window=1, shift=0, periods_per_year=1)
    with pytest.raises(ValueError, match="fits without one"):
        error_density(exact)
