"""What is written about the program is there and true: help, README, docstrings, no stray host."""

import ast
import re
import subprocess
from pathlib import Path

import click
import pytest

from app.cli import pricewake

ROOT = Path(__file__).resolve().parents[2]
COMMANDS = {"pricewake": pricewake, **pricewake.commands}
OPTIONS = [
    (name, option)
    for name, command in COMMANDS.items()
    for option in command.params
    if isinstance(option, click.Option)
]
ANALYTICS = sorted(
    path for path in (ROOT / "analytics").rglob("*.py") if path.name != "__init__.py"
)
IGNORED = {"__pycache__", "build", "dist", "out", "shots"}


def files_of_the_project():
    """What git tracks; without git, what lies there and is not hidden or built."""
    listed = subprocess.run(
        ["git", "ls-files", "-z"], cwd=ROOT, capture_output=True, check=False, text=True
    )
    if listed.returncode == 0 and listed.stdout:
        found = [ROOT / name for name in listed.stdout.split("\0") if name]
    else:
        found = [
            path
            for path in ROOT.rglob("*")
            if not {part for part in path.relative_to(ROOT).parts[:-1] if part.startswith(".")}
            - {".ci"}
            and not IGNORED & set(path.parts)
        ]
    return sorted(path for path in found if path.is_file())


def text_of(path):
    try:
        return path.read_text(encoding="utf-8")
    except UnicodeDecodeError:
        return ""  # a picture, or a sample in another encoding


# Help ----------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", list(COMMANDS))
def test_every_command_says_what_it_does(name):
    first = COMMANDS[name].help.splitlines()[0]
    assert first.rstrip()[-1] in ".,:"
    assert len(first) > 30


@pytest.mark.parametrize(
    ("name", "option"), OPTIONS, ids=lambda value: getattr(value, "name", value)
)
def test_every_flag_of_every_command_has_help(name, option):
    assert option.help, f"{name} {option.opts[0]}"
    assert option.help.endswith(".")


# README --------------------------------------------------------------------------------------


def readme_commands():
    return re.findall(r"^```sh\n(.*?)^```$", text_of(ROOT / "README.md"), re.DOTALL | re.MULTILINE)


def test_the_readme_has_two_commands_of_one_line():
    blocks = readme_commands()
    assert len(blocks) == 2
    assert all(block.count("\n") == 1 for block in blocks)
    opening, testing = blocks
    assert opening.rstrip().endswith("pricewake")
    assert testing.rstrip().endswith("pytest")
    for block in blocks:
        assert block.startswith("python3 -m venv .venv && ")


def test_ci_runs_the_test_command_of_the_readme_and_no_other():
    script = text_of(ROOT / ".ci" / "run")
    shown = subprocess.run(
        ["bash", ".ci/run", "--show"], cwd=ROOT, capture_output=True, text=True, check=True
    )
    assert shown.stdout == readme_commands()[1]
    assert 'bash -c "$test_command"' in script
    assert "pytest" not in script


def test_ci_is_a_careful_program():
    path = ROOT / ".ci" / "run"
    lines = text_of(path).splitlines()
    assert lines[0] == "#!/usr/bin/env bash"
    assert "set -euo pipefail" in lines
    assert path.stat().st_mode & 0o111
    subprocess.run(["bash", "-n", str(path)], check=True)


# What must stand nowhere ---------------------------------------------------------------------

REGISTRY = re.compile(
    r"py[p]i\.(org|python)|python[h]osted|np[m]js|npm\.dev|ana[c]onda\.(org|com)|crates\.[i]o"
    r"|deb\.deb[i]an|conda-f[o]rge\.org|proxy\.golan[g]|rubyg[e]ms\.org",
    re.IGNORECASE,
)
MACHINE = re.compile(r"(?<![\w.:/>}-])/(work|tmp|root|mnt|Users|home/(?!desk))(?=[/\s\"'`]|$)")


def test_no_file_names_a_package_registry_or_a_path_of_a_machine():
    found = []
    for path in files_of_the_project():
        for number, line in enumerate(text_of(path).splitlines(), start=1):
            if REGISTRY.search(line) or MACHINE.search(line):
                found.append(f"{path.relative_to(ROOT)}:{number}: {line.strip()[:100]}")
    assert found == []


@pytest.mark.parametrize(
    "line",
    [
        "see /wo" + "rk/main",
        "cd /tm" + "p",
        "'/ro" + "ot/x'",
        "pip install -i https://py" + "pi.org/simple",
        "https://files.python" + "hosted.org/x",
        "https://registry.np" + "mjs.org",
    ],
)
def test_the_search_finds_what_it_looks_for(line):
    assert REGISTRY.search(line) or MACHINE.search(line)


@pytest.mark.parametrize(
    "line",
    [
        "app/work/x",
        "/<page>/work/<kind>",
        "${page}/work/${kind}",
        "a network/path",
        "/root_cause",
        "http://127.0.0.1/tmp-page",
        "a/tmp/b",
    ],
)
def test_the_search_leaves_other_words_alone(line):
    assert not REGISTRY.search(line)
    assert not MACHINE.search(line)


def test_the_search_sees_the_files():
    names = {path.relative_to(ROOT).as_posix() for path in files_of_the_project()}
    assert {"README.md", "pyproject.toml", ".ci/run", "app/cli.py", "analytics/cell.py"} <= names


LONGEST = 400
STILL_LONGER: dict[str, int] = {}  # to be split; may not grow


def test_no_file_of_code_is_longer_than_400_lines():
    # Tests are tables and may be longer.
    lengths = {
        path.relative_to(ROOT).as_posix(): len(text_of(path).splitlines())
        for path in files_of_the_project()
        if path.suffix in (".py", ".js")
        and path.relative_to(ROOT).parts[0] in ("analytics", "app", "assets")
    }
    long = {n: lines for n, lines in lengths.items() if lines > STILL_LONGER.get(n, LONGEST)}
    assert long == {}


# Docstrings ----------------------------------------------------------------------------------


def public(path, kind):
    tree = ast.parse(text_of(path))
    return [node for node in tree.body if isinstance(node, kind) and not node.name.startswith("_")]


def is_dataclass(node):
    return any("dataclass" in ast.unparse(decorator) for decorator in node.decorator_list)


def analyses(path):
    """Public functions that take three or more keyword-only arguments."""
    return [f for f in public(path, ast.FunctionDef) if len(f.args.kwonlyargs) >= 3]


RESULTS = {
    word
    for path in ANALYTICS
    for function in analyses(path)
    for word in re.findall(r"\w+", ast.unparse(function.returns))
}


@pytest.mark.parametrize("path", ANALYTICS, ids=lambda path: path.name)
def test_every_analysis_documents_what_goes_in_and_what_comes_out(path):
    for function in public(path, ast.FunctionDef):
        assert ast.get_docstring(function), function.name
    for function in analyses(path):
        text = ast.get_docstring(function)
        assert "\nParameters\n----------\n" in text, function.name
        assert "\nReturns\n-------\n" in text, function.name
        if any(isinstance(part, ast.Raise) for part in ast.walk(function)):
            assert "\nRaises\n------\n" in text, function.name


@pytest.mark.parametrize("path", ANALYTICS, ids=lambda path: path.name)
def test_every_result_of_an_analysis_documents_each_of_its_fields(path):
    for node in public(path, ast.ClassDef):
        if node.name in RESULTS and is_dataclass(node):
            text = ast.get_docstring(node) or ""
            fields = [part.target.id for part in node.body if isinstance(part, ast.AnnAssign)]
            bare = [name for name in fields if not re.search(rf"\b{name}\b", text)]
            assert [name for name in bare if not name.startswith("_")] == [], node.name


def test_results_are_found():
    assert {"LagSurface", "LagCell"} <= RESULTS
