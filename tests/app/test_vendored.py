"""The chart library that travels in assets/ is the one that the installed plotly was made for."""

import re

from plotly.offline import get_plotlyjs_version

from app.places import bundled


def test_bundled_plotly_js_has_the_major_version_of_the_package():
    head = (bundled("assets") / "plotly-cartesian.min.js").read_text(encoding="utf-8")[:300]
    version = re.search(r"plotly\.js \(cartesian - minified\) v(\d+)\.", head)
    assert version, "the file names its version"
    assert version[1] == get_plotlyjs_version().split(".")[0]
