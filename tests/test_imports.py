"""Data flows one way through the package, and nothing heavy is loaded before it is used."""

import ast
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

import optics

PACKAGE = Path(optics.__file__).parent
LEVELS = (
    ("arrays", "errors", "faults", "byvalue", "units"),
    ("media", "radiation"),
    (
        "agreement",
        "assumptions",
        "collection",
        "depth",
        "light",
        "roughness",
        "sample",
        "spectrum",
        "layer",
        "stack",
        "stackfile",
        "tolerances",
    ),
    ("waves",),
    ("fate",),
    ("study", "transport"),
    ("output",),
    ("cli",),
)  # a new part of the package takes its place here
LEVEL = {part: level for level, parts in enumerate(LEVELS) for part in parts}
KERNELS = ("waves", "fate")
NOT_IN_KERNELS = {"click", "csv", "matplotlib", "pathlib", "pydantic", "tomlkit", "tomllib"}
HEAVY = {"matplotlib", "pandas", "pydantic", "scipy.optimize", "scipy.stats"}
MODULES = sorted(path for path in PACKAGE.rglob("*.py") if path != PACKAGE / "__init__.py")


def part_of(path: Path) -> str:
    return path.relative_to(PACKAGE).parts[0].removesuffix(".py")


def name_of(path: Path) -> str:
    return path.relative_to(PACKAGE).as_posix()


def imported(nodes: Iterator[ast.AST] | list[ast.stmt]) -> Iterator[str]:
    for node in nodes:
        if isinstance(node, ast.Import):
            yield from (alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, "imports name the whole path"
            yield node.module or ""
            yield from (f"{node.module}.{alias.name}" for alias in node.names)


def all_imports(path: Path) -> set[str]:
    return set(imported(ast.walk(ast.parse(path.read_text(encoding="utf-8")))))


@pytest.mark.parametrize("path", MODULES, ids=name_of)
def test_a_module_imports_from_its_own_level_or_below(path):
    own = LEVEL[part_of(path)]
    ours = {name.split(".")[1] for name in all_imports(path) if name.startswith("optics.")}
    assert not [part for part in ours if LEVEL[part] > own]


@pytest.mark.parametrize("path", MODULES, ids=name_of)
def test_a_module_does_not_import_by_way_of_the_package_face(path):
    tree = ast.parse(path.read_text(encoding="utf-8"))
    assert not [node for node in ast.walk(tree) if isinstance(node, ast.ImportFrom) and node.module == "optics"]


@pytest.mark.parametrize("path", [path for path in MODULES if part_of(path) in KERNELS], ids=name_of)
def test_kernels_know_nothing_of_files_screens_and_figures(path):
    assert not {name.split(".")[0] for name in all_imports(path)} & NOT_IN_KERNELS


@pytest.mark.parametrize("path", MODULES, ids=name_of)
def test_heavy_libraries_are_imported_where_they_are_used(path):
    if name_of(path).startswith("output/") and path.name.endswith("figures.py"):
        pytest.skip("a module of figures, itself imported where it is used")
    at_top = set(imported(ast.parse(path.read_text(encoding="utf-8")).body))
    assert not {name for name in at_top if any(name == heavy or name.startswith(f"{heavy}.") for heavy in HEAVY)}


def loaded_by(statement: str) -> set[str]:
    code = f"import sys; {statement}; print(*sys.modules)"
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    return {name.split(".")[0] for name in run.stdout.split()}


def test_importing_the_package_loads_no_library():
    assert not loaded_by("import optics") & {"numpy", "pandas", "scipy", "matplotlib", "pydantic", "click"}


def test_the_help_of_every_command_needs_click_alone():
    statement = "from optics.cli import main; [main.get_command(None, name) for name in main.list_commands(None)]"
    assert not loaded_by(statement) & {"numpy", "pandas", "scipy", "matplotlib", "pydantic", "tomlkit"}


def test_public_names_are_sorted_and_all_of_them_load():
    assert list(optics.__all__) == sorted(optics.__all__)
    assert set(optics.__all__) == set(optics._HOMES)
    assert not [name for name in optics.__all__ if getattr(optics, name) is None]


def test_a_name_that_is_not_public_is_an_attribute_error():
    with pytest.raises(AttributeError, match="no attribute 'nothing'"):
        optics.nothing  # noqa: B018  # asking is the test


def test_no_module_is_longer_than_400_lines_and_no_function_longer_than_60():
    long = [name_of(path) for path in MODULES if len(path.read_text(encoding="utf-8").splitlines()) > 400]
    for path in MODULES:
        nodes = ast.walk(ast.parse(path.read_text(encoding="utf-8")))
        functions = [node for node in nodes if isinstance(node, ast.FunctionDef)]
        long += [f"{name_of(path)}: {each.name}" for each in functions if each.end_lineno - each.lineno > 60]
    assert not long
