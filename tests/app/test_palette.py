"""The palette and the template: one source, told apart by every kind of sight, and in grey."""

import re
from itertools import combinations, pairwise

import pytest

from app.figures import theme
from app.places import bundled
from tests.references.colour_vision import VISIONS, contrast, distance, luminance, seen

THEMES = ("light", "dark")
APART = 8.0  # OKLab units times 100; 2 is about what is just seen side by side (Ottosson 2020)
PARTS = tuple(f"part-{number}" for number in range(1, 8))
DIVERGING = ("low-3", "low-2", "low-1", "zero", "high-1", "high-2", "high-3")
SEQUENTIAL = tuple(f"few-{number}" for number in range(1, 7))
TIME = ("early", "middle", "late")


@pytest.fixture(params=THEMES)
def tokens(request):
    return theme.colours()[request.param]


# The judge ------------------------------------------------------------------------------------


def test_black_and_white_are_one_hundred_apart_and_twenty_one_in_contrast():
    # OKLab gives white a lightness of 1 (Ottosson 2020); WCAG 2.2 gives 21:1.
    assert distance("#000000", "#FFFFFF") == pytest.approx(100, abs=0.01)
    assert contrast("#000000", "#FFFFFF") == pytest.approx(21)


def test_oklab_has_the_published_values():
    # Ottosson (2020), "A perceptual color space for image processing", converter: pure red, blue.
    assert seen("#FF0000", "usual") == pytest.approx([62.796, 22.486, 12.585], abs=0.01)
    assert seen("#0000FF", "usual") == pytest.approx([45.201, -3.246, -31.153], abs=0.01)


@pytest.mark.parametrize("vision", VISIONS)
def test_each_kind_of_sight_leaves_grey_grey(vision):
    # The rows of the matrices of Machado et al. (2009) sum to one.
    assert VISIONS[vision].sum(axis=1) == pytest.approx(1, abs=1e-5)
    assert distance("#808080", "#808080", vision) == 0


def test_red_and_green_come_close_without_the_red_or_the_green_cones():
    # Chosen with equal luminance: what these kinds of sight are known for.
    red, green = "#C04040", "#5C7A1E"
    assert distance(red, green) > 20
    assert distance(red, green, "deuteranopia") < 0.5 * distance(red, green)


# Categories -----------------------------------------------------------------------------------


@pytest.mark.parametrize("vision", VISIONS)
@pytest.mark.parametrize("names", [theme.CATEGORIES, (*PARTS, "rest")], ids=["roles", "parts"])
def test_categories_are_told_apart(tokens, names, vision):
    near = {
        (one, other): round(distance(tokens[one], tokens[other], vision), 1)
        for one, other in combinations(names, 2)
        if distance(tokens[one], tokens[other], vision) < APART
    }
    assert near == {}


def test_what_is_drawn_thin_stands_off_the_paper(tokens):
    # WCAG 2.2, 1.4.11: graphics need 3:1; 1.4.3: text needs 4.5:1.
    for name in theme.CATEGORIES:
        assert contrast(tokens[name], tokens["paper"]) >= 3, name
    for name in ("ink", "quiet", "alarm", "driver", "response"):
        for ground in ("paper", "raised"):
            assert contrast(tokens[name], tokens[ground]) >= 4.5, name


# Scales ---------------------------------------------------------------------------------------


@pytest.mark.parametrize("vision", VISIONS)
@pytest.mark.parametrize("names", [SEQUENTIAL, TIME], ids=["sequential", "time"])
def test_ordered_scales_change_lightness_one_way_under_every_sight(tokens, names, vision):
    lightness = [seen(tokens[name], vision)[0] for name in names]
    steps = [after - before for before, after in pairwise(lightness)]
    assert all(step > 4 for step in steps) or all(step < -4 for step in steps), steps


def test_ordered_scales_print_in_grey(tokens):
    for names in (SEQUENTIAL, TIME):
        grey = [luminance(tokens[name]) for name in names]
        ordered = sorted(grey)
        assert grey in (ordered, ordered[::-1])
        assert all(high / low > 1.2 for low, high in pairwise([each + 0.05 for each in ordered]))


@pytest.mark.parametrize("vision", VISIONS)
def test_the_diverging_scale_leaves_zero_evenly_and_its_sides_differ(tokens, vision):
    lightness = [seen(tokens[name], vision)[0] for name in DIVERGING]
    low, high = lightness[:4], lightness[:2:-1]
    for side in (low, high):
        steps = [after - before for before, after in pairwise(side)]
        assert all(step > 4 for step in steps) or all(step < -4 for step in steps)
    for one, other in zip(DIVERGING[:3], DIVERGING[:3:-1], strict=True):
        assert distance(tokens[one], tokens[other], vision) > APART
    for one, other in pairwise(DIVERGING):
        assert distance(tokens[one], tokens[other], vision) > APART


# One source -----------------------------------------------------------------------------------


def test_the_template_holds_only_tokens():
    light = {value.lower() for value in theme.colours()["light"].values()}
    used = set(re.findall(r"#[0-9A-Fa-f]{6}", str(theme.template().to_plotly_json())))
    assert used
    assert {value.lower() for value in used} <= light
    layout = theme.template().layout
    assert list(layout.colorway) == [theme.colour(name) for name in theme.CATEGORIES]
    assert layout.font.size == 12
    css = (bundled("assets") / "tokens.css").read_text(encoding="utf-8")
    assert layout.font.family in css.replace('"', "")


def test_the_dark_set_has_every_colour_of_the_light_one_and_none_stands_for_two():
    light, dark = theme.colours()["light"], theme.colours()["dark"]
    assert light.keys() == dark.keys()
    assert len({value.lower() for value in light.values()}) == len(light)


@pytest.mark.parametrize("name", ["page.css", "page-data.css", "parts.css"])
def test_no_other_stylesheet_writes_a_colour(name):
    text = (bundled("assets") / name).read_text(encoding="utf-8")
    assert set(re.findall(r"#[0-9A-Fa-f]{3,8}\b(?=[;\s,)])", text)) <= {"#fff"}  # white paper
    assert not re.search(r"\b(rgb|hsl)a?\(", text)
