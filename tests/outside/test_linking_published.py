"""Re-referencing and linking against figures that statistical offices print."""

import numpy as np
import pandas as pd
import pytest

from analytics.linking import linked, rereferenced
from analytics.series import Series

# Australian Bureau of Statistics, 6401.0, September 2012, appendix 1: all groups, old reference
# base, the four quarters of 2011-12.
OLD = Series("All groups", pd.Period("2011Q3", "Q"), [179.4, 179.4, 179.5, 180.4])


def test_abs_index_reference_period_of_2011_12():
    # The financial-year average 179.675 is printed as 179.7, the factor from it as 0.5565, and
    # the newest quarter on the new base as 100.4.
    done = rereferenced(OLD, OLD.first, OLD.last)
    assert 100 / done.factor == pytest.approx(179.7, abs=0.05)
    assert done.factor == pytest.approx(0.5565, abs=1e-4)
    assert done.series.values[-1] == pytest.approx(100.4, abs=0.05)
    assert done.series.values.mean() == pytest.approx(100.0, abs=1e-12)


def test_abs_conversion_back_to_the_old_base():
    # The same appendix: 100.4 times 1.7970 is 180.4; from rounded figures the way there and back
    # returns the start within rounding, and from unrounded ones exactly.
    done = rereferenced(OLD, OLD.first, OLD.last).series
    assert round(float(done.values[-1]), 1) * 1.7970 == pytest.approx(180.4, abs=0.05)
    back = rereferenced(done, OLD.last, to=180.4)
    np.testing.assert_allclose(back.series.values, OLD.values, rtol=1e-14)
    rounded = Series("All groups", OLD.first, done.values.round(1))
    again = rereferenced(rounded, OLD.first, OLD.last, to=179.675).series
    assert np.abs(again.values - OLD.values).max() <= 0.05 * 1.797 + 0.05


def test_india_factor_from_the_means_of_twelve_overlapping_months():
    # Economic Survey of India 2020-21, volume 2, chapter 5: series on 2001 and 2016 = 100 linked
    # by the factor 2.88, the ratio of the averages of September 2019 to August 2020. The monthly
    # figures are not printed there; these are made so that their averages have that ratio, while
    # no single month does.
    start = pd.Period("2019-09", "M")
    season = np.sin(np.arange(12) * np.pi / 6)
    new = Series("Workers, 2016 = 100", start, 116.0 + season)
    old = Series("Workers, 2001 = 100", start, 2.88 * (116.0 - 2.0 * season))
    done = linked(old, new, start, start + 11)
    assert 1 / done.factor == pytest.approx(2.88, abs=1e-12)
    one_month = linked(old, new, start + 3)
    assert abs(1 / one_month.factor - 2.88) > 0.02
