"""Quick inference of the Lag page: every cell judged by analytics, and episodes by their names."""

from dataclasses import replace
from itertools import pairwise

import pytest

from analytics.hac import hac_surface
from analytics.influence import cell_without
from analytics.robust import surface_inference
from analytics.series import period_code
from app.compute import cell_span
from app.lag import cells
from app.state import StateError
from tests.app.economies import LAG, planted
from tests.app.evidence_cases import SMALL, fresh, same

# The map -------------------------------------------------------------------------------------


def test_the_same_months_are_fewer_than_all():
    bridge = fresh()
    own, cut = (cells.inference(replace(SMALL, months=m), bridge) for m in ("own", "same"))
    assert cut.n == 240 - 11 - 12 < own.n == 240 - 2 - LAG


@pytest.mark.parametrize("months", ["own", "same"])
def test_every_cell_of_the_map_is_judged_by_analytics(months):
    bridge, state = fresh(), replace(SMALL, months=months)
    pair = bridge.pair(state)
    options = {"windows": range(1, 7), "shifts": range(-6, 13)}
    sides = pair.driver.values, pair.response.values
    same(
        cells.map_inference(state, bridge),
        surface_inference(*sides, **options, same_months=months == "same", periods_per_year=12),
    )
    same(cells.map_hac(state, bridge), hac_surface(*sides, **options))
    at = cells.map_inference(state, bridge)
    assert at.p[2, 6 + LAG] == pytest.approx(cells.inference(state, bridge).p, rel=1e-9)


# Episodes ------------------------------------------------------------------------------------


@pytest.mark.parametrize("months", ["own", "same"])
@pytest.mark.parametrize("shift", [LAG, 0, -4])
def test_an_episode_is_named_by_its_months_and_found_by_its_name(shift, months):
    bridge, state = fresh(), replace(SMALL, shift=shift, months=months)
    pair = bridge.pair(state)
    start, stop = cell_span(pair, state)
    parts = cells.influence(state, bridge).episodes
    codes = [cells.episode_code(episode, pair, state) for episode in parts]
    assert len(set(codes)) == len(parts) > 2
    # They tile the driver's months: each begins in the month after the last one's end.
    ends = [code.split(":") for code in codes]
    names = [period_code(period) for period in pair.periods]
    for (_, last), (first, _) in pairwise(ends):
        assert names.index(first) == names.index(last) + 1
    cell_start = start + bridge.cell(state).start
    assert ends[0][0] == names[cell_start]
    assert ends[-1][1] == names[cell_start + bridge.cell(state).n - 1]
    for code, episode in zip(codes, parts, strict=True):
        found = cells.without_episode(replace(state, without=code), bridge)
        same(found[0], episode)
        same(
            found[1],
            cell_without(
                pair.driver.values[start:stop], pair.response.values[start:stop],
                window=3, shift=shift, episode=episode, periods_per_year=12,
            ),
        )  # fmt: skip
        assert found[1].slope == pytest.approx(episode.slope_without, rel=1e-12)


def test_no_episode_named_is_none_left_out():
    assert cells.without_episode(SMALL, fresh()) is None


@pytest.mark.parametrize("name", ["1950-01:1951-01", "2000-03:2000-04"])
def test_an_episode_that_this_cell_does_not_have_is_refused(name):
    with pytest.raises(StateError, match=f"Without must name an episode of this cell, .*{name}"):
        cells.without_episode(replace(SMALL, without=name), fresh())


def test_episodes_of_quarters_are_named_by_quarters():
    bridge = fresh(*planted(160, first="1980Q1"))
    code = cells.episode_code(cells.influence(SMALL, bridge).episodes[0], bridge.pair(SMALL), SMALL)
    assert code.startswith("1980-Q3:")  # the third quarter ends the first window of three
    assert cells.without_episode(replace(SMALL, without=code), bridge)[0].start == 0
