"""What the import linter cannot see: the error taxonomy, what a start costs, who may know which package."""

import ast
import importlib
import inspect
import json
import subprocess
import sys
from pathlib import Path

import click
import pytest

import traverse
from traverse import errors
from traverse.cli import main

ROOT = Path(__file__).parents[2]
PACKAGE = ROOT / "traverse"
MODULES = {
    ".".join(path.relative_to(ROOT).with_suffix("").parts).removesuffix(".__init__"): path for path in sorted(PACKAGE.rglob("*.py"))
}
HEAVY = ("numpy", "pandas", "scipy", "openpyxl", "matplotlib")
# Which rooms may know which package; a name covers what lies under it. Holds for modules that are still to come.
HOMES = {
    "click": ("traverse.cli",),
    "pandas": ("traverse.importers", "traverse.report.frames"),
    "matplotlib": ("traverse.report.figures", "traverse.report.plan_figure", "traverse.report.study_figure"),
    "openpyxl": ("traverse.importers", "traverse.report.workbook", "traverse.report._charts", "traverse.report._theme"),
}
# The workbook's two private parts; nobody but it may use them.
WORKBOOK_PARTS = ("traverse.report._charts", "traverse.report._theme")
PUBLIC = ["Job", "Measured", "Plan", "Reduction", "Setup", "TraverseError", "__version__", "load", "load_setup", "plan", "reduce"]


def tree(module):
    return ast.parse(MODULES[module].read_text(encoding="utf-8"))


def imported(node):
    """Return the full names an import statement names."""
    if isinstance(node, ast.Import):
        return [alias.name for alias in node.names]
    if isinstance(node, ast.ImportFrom):
        return [node.module or "", *(f"{node.module}.{alias.name}" for alias in node.names)]
    return []


def under(name, homes):
    return any(name == home or name.startswith(f"{home}.") for home in homes)


# --- errors

TAXONOMY = {name for name, kind in inspect.getmembers(errors, inspect.isclass) if issubclass(kind, errors.TraverseError)}
CLI_ONLY = {"click.ClickException", "click.UsageError", "click.BadParameter", "SystemExit"}


def strangers(code, allowed):
    """Return every raise whose class is not allowed: neither named, nor made by a function that returns one, nor caught as one.

    A bare ``raise`` passes what was caught on. The one AttributeError of a module's ``__getattr__`` is Python's own protocol.
    """
    makers = {
        node.name for node in ast.walk(code)
        if isinstance(node, ast.FunctionDef) and node.returns is not None and ast.unparse(node.returns).strip("'\"") in allowed
    }
    caught = {
        handler.name for handler in ast.walk(code)
        if isinstance(handler, ast.ExceptHandler) and handler.name and handler.type is not None
        and {ast.unparse(kind) for kind in (handler.type.elts if isinstance(handler.type, ast.Tuple) else [handler.type])} <= allowed
    }
    for node in ast.walk(code):  # a caught error that is kept for later under another name
        if isinstance(node, ast.Assign) and isinstance(node.value, ast.Name) and node.value.id in caught:
            caught |= {target.id for target in node.targets if isinstance(target, ast.Name)}
    protocol = {
        id(inner) for node in ast.walk(code) if isinstance(node, ast.FunctionDef) and node.name == "__getattr__" for inner in ast.walk(node)
    }
    found = []
    for node in ast.walk(code):
        if not isinstance(node, ast.Raise) or node.exc is None:
            continue
        called = node.exc.func if isinstance(node.exc, ast.Call) else node.exc
        name = ast.unparse(called)
        fine = name in allowed | makers or (called is node.exc and name in caught) or (id(node) in protocol and name == "AttributeError")
        if not fine:
            found.append(f"line {node.lineno}: {name}")
    return found


@pytest.mark.parametrize("module", MODULES)
def test_every_raise_is_of_the_taxonomy(module):
    allowed = TAXONOMY | (CLI_ONLY if under(module, ("traverse.cli", "traverse.__main__")) else set())
    assert not strangers(tree(module), allowed)


@pytest.mark.parametrize(("code", "count"), [
    ("raise ValueError('x')", 1), ("raise KeyError", 1), ("raise NotImplementedError", 1), ("raise AssertionError('x')", 1),
    ("raise JobError('x')", 0), ("try:\n    f()\nexcept OSError as e:\n    raise e", 1), ("try:\n    f()\nexcept OSError:\n    raise", 0),
    ("def f() -> JobError:\n    ...\nraise f()", 0), ("def f() -> ValueError:\n    ...\nraise f()", 1), ("raise SystemExit(1)", 1),
    ("try:\n    f()\nexcept JobError as e:\n    raise e", 0), ("def f():\n    raise AttributeError('x')", 1),
])
def test_the_check_of_raises_sees(code, count):
    assert len(strangers(ast.parse(code), TAXONOMY)) == count


@pytest.mark.parametrize("name", sorted(TAXONOMY))
def test_every_error_says_where_what_and_how(name):
    text = str(getattr(errors, name)("is odd", where="a.csv:3", expected="an even number", how="write 4"))
    assert text == "a.csv:3: is odd; an even number; write 4"
    assert inspect.getdoc(getattr(errors, name))


# --- who knows what

@pytest.mark.parametrize("module", MODULES)
def test_packages_stay_in_their_rooms(module):
    names = [name for node in ast.walk(tree(module)) for name in imported(node)]
    for package, homes in HOMES.items():
        if not under(module, homes):
            assert not [name for name in names if under(name, (package,))], f"{package} is for {homes}"
    if not under(module, ("traverse.report.workbook", *WORKBOOK_PARTS)):
        assert not [name for name in names if under(name, WORKBOOK_PARTS)]
    assert not [name for name in names if under(name, ("logging", "warnings"))], "the library speaks through findings"


@pytest.mark.parametrize("module", MODULES)
def test_only_the_tables_and_files_open_files(module):
    """Everything else goes through ``traverse.files``, which refuses with advice and leaves nothing half-written."""
    if under(module, ("traverse.tables", "traverse.files")):
        return
    openers = {"open", "fdopen", "read_text", "read_bytes", "write_text", "write_bytes"}
    for node in ast.walk(tree(module)):
        if isinstance(node, ast.Call):
            name = ast.unparse(node.func)
            through_files = name.startswith("files.")
            assert through_files or name.rsplit(".", 1)[-1] not in openers, f"line {node.lineno}: {name}"


# --- what a start costs

def loaded_after(code, *arguments, cwd=ROOT):
    """Run code in a fresh interpreter; return the names of the modules it has loaded."""
    script = f"import sys, json\n{code}\nsys.stderr.write('MODULES ' + json.dumps(sorted(sys.modules)))"
    done = subprocess.run([sys.executable, "-c", script, *arguments], cwd=cwd, capture_output=True, text=True, check=False)
    assert "MODULES " in done.stderr, done.stderr
    return set(json.loads(done.stderr.rpartition("MODULES ")[2]))


RUN = "from traverse.cli import main\nmain(sys.argv[1:], prog_name='traverse', standalone_mode=False)"


@pytest.mark.parametrize("command", ["", *sorted(main.commands)])
def test_help_loads_nothing_heavy(command):
    loaded = loaded_after(RUN, *command.split(), "--help")
    assert not loaded & set(HEAVY)
    assert "click" in loaded


def test_importing_the_package_loads_nothing():
    new = loaded_after("import traverse") - loaded_after("")
    assert {name for name in new if name.partition(".")[0] not in sys.stdlib_module_names} == {"traverse", "traverse._version"}


def test_a_reduction_loads_no_pandas_pictures_or_statistics():
    loaded = loaded_after(RUN, "reduce", "example_data/supply_duct.toml", "--json", "-")
    assert "numpy" in loaded, "the reduction has run"
    assert not loaded & {"pandas", "matplotlib", "openpyxl", "scipy.stats", "scipy.constants", "scipy.optimize", "scipy.interpolate"}


@pytest.mark.parametrize("module", [module for module in MODULES if under(module, ("traverse.cli",))])
def test_commands_import_their_work_inside_their_bodies(module):
    for node in tree(module).body:
        for name in imported(node):
            top = name.partition(".")[0]
            light = top in {"click", *sys.stdlib_module_names} or under(name, ("traverse.errors", "traverse._version", "traverse.cli"))
            assert light, f"line {node.lineno}: {name} at module level"


# --- the public names

def test_public_names_are_exactly_these():
    assert sorted(traverse.__all__) == PUBLIC
    assert dir(traverse) == PUBLIC
    for name in PUBLIC:
        assert getattr(traverse, name) is not None
    with pytest.raises(AttributeError, match="no attribute 'redcue'"):
        _ = traverse.redcue


@pytest.mark.parametrize("module", MODULES)
def test_all_names_what_is_there(module):
    if module == "traverse.__main__":
        return
    loaded = importlib.import_module(module)
    names = getattr(loaded, "__all__", [])
    assert len(names) == len(set(names))
    assert [name for name in names if not hasattr(loaded, name)] == []


def test_every_command_explains_itself():
    assert isinstance(main, click.Group)
    for name, command in main.commands.items():
        assert command.help and f"Example: traverse {name}" in command.help
        assert all(parameter.help for parameter in command.params if isinstance(parameter, click.Option))
