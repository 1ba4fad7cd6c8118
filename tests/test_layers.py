"""The order of the layers and the budgets of the code, read from the source itself."""

from __future__ import annotations

import ast
import re
from collections.abc import Iterator
from pathlib import Path

import pytest

ROOT = Path(__file__).parent.parent
PACKAGE = ROOT / "fabgen"

# Low to high. A module may import from its own row and from rows above it in this list.
LAYERS: tuple[tuple[str, ...], ...] = (
    ("fabgen", "fabgen.errors", "fabgen.progress", "fabgen.cache"),
    ("fabgen.units", "fabgen.folder", "fabgen.resources"),
    ("fabgen.stock",),
    ("fabgen.theory",),
    ("fabgen.job", "fabgen.job_units", "fabgen.job_reader"),
    ("fabgen.fields",),
    ("fabgen.sizing.records",),
    ("fabgen.sizing",),
    ("fabgen.parts",),
    ("fabgen.checks.records",),
    ("fabgen.checks",),
    ("fabgen.drawing",),
    ("fabgen.writers",),
    ("fabgen.sized",),
    ("fabgen.pack", "fabgen.report", "fabgen.start", "fabgen.completion", "fabgen.job_page", "fabgen.plots"),
    ("fabgen.commands",),
    ("fabgen.cli", "fabgen.__main__"),
)
# Narrower than the row: what these may use of what lies below them.
ONLY = {
    "fabgen.units": {"fabgen.errors"},
    "fabgen.stock": {"fabgen.errors", "fabgen.units"},
    "fabgen.theory": {"fabgen.errors", "fabgen.units", "fabgen.stock"},
    "fabgen.fields": {"fabgen.errors", "fabgen.units", "fabgen.theory", "fabgen.progress"},
    "fabgen.sizing.records": {"fabgen.job"},
    "fabgen.parts": {
        "fabgen.errors",
        "fabgen.units",
        "fabgen.stock",
        "fabgen.theory",
        "fabgen.job",
        "fabgen.sizing.records",
    },
}
# A stated exception: reading drawings back is part of the checks (design.md section 5 allows "all above").
ALLOWED: set[tuple[str, str]] = set()

MAX_FUNCTION_LINES = 40
MAX_MODULE_LINES = 600
HEAVY = (
    "cadquery",
    "OCP",
    "netgen",
    "pyngcore",
    "matplotlib",
    "numba",
    "ezdxf",
    "shapely",
    "reportlab",
    "trimesh",
    "rich",
)


def modules() -> list[Path]:
    return sorted(PACKAGE.rglob("*.py"))


def dotted(path: Path) -> str:
    name = ".".join(path.relative_to(ROOT).with_suffix("").parts)
    return name.removesuffix(".__init__")


def layer_of(module: str) -> int:
    """The row of the longest name in the table that the module lies in; package files above their parts count too."""
    best = max(
        (
            name
            for row in LAYERS
            for name in row
            if module == name or (module.startswith(name + ".") and name != "fabgen")
        ),
        key=len,
        default="",
    )
    assert best, f"{module} stands in no row of the layer table; add it"
    return next(i for i, row in enumerate(LAYERS) if best in row)


def imports(path: Path) -> Iterator[tuple[str, int]]:
    """Every module of this program that a file imports, at run time or for types, with the line."""
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            yield from ((alias.name, node.lineno) for alias in node.names if alias.name.split(".")[0] == "fabgen")
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}: write imports from the root"
            if node.module and node.module.split(".")[0] == "fabgen":
                for alias in node.names:
                    inner = f"{node.module}.{alias.name}"
                    is_module = (ROOT / inner.replace(".", "/")).with_suffix(".py").exists() or (
                        ROOT / inner.replace(".", "/")
                    ).is_dir()
                    yield (inner if is_module else node.module), node.lineno


def upward(path: Path) -> Iterator[str]:
    module = dotted(path)
    own = layer_of(module)
    scope = next((name for name in ONLY if module == name or module.startswith(name + ".")), None)
    for target, line in imports(path):
        if (module, target) in ALLOWED:
            continue
        if layer_of(target) > own:
            yield f"{module}:{line} imports upward: {target}"
        elif scope is not None and not _within(target, {"fabgen", scope.removesuffix(".records"), *ONLY[scope]}):
            yield f"{module}:{line} may not use {target}"


def _within(target: str, names: set[str]) -> bool:
    return any(target == name or (name != "fabgen" and target.startswith(name + ".")) for name in names)


@pytest.mark.parametrize("path", modules(), ids=dotted)
def test_nothing_imports_upward(path: Path) -> None:
    assert not list(upward(path))


def test_an_upward_import_would_be_found(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("tests.test_layers.ROOT", tmp_path)
    bad = tmp_path / "fabgen" / "stock" / "bad.py"
    bad.parent.mkdir(parents=True)
    bad.write_text("def f():\n    from fabgen.sizing.records import Feed\n", encoding="utf-8")
    assert list(upward(bad)) == ["fabgen.stock.bad:2 imports upward: fabgen.sizing.records"]


@pytest.mark.parametrize("path", modules(), ids=dotted)
def test_budgets(path: Path) -> None:
    text = path.read_text(encoding="utf-8")
    assert len(text.splitlines()) <= MAX_MODULE_LINES
    for node in ast.walk(ast.parse(text)):
        if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef):
            assert body_lines(node) <= MAX_FUNCTION_LINES, f"{path.name}: {node.name} is too long"


def body_lines(node: ast.FunctionDef | ast.AsyncFunctionDef) -> int:
    """Lines of the body without the docstring."""
    body = node.body[1:] if ast.get_docstring(node) is not None else node.body
    return (node.end_lineno or node.lineno) - body[0].lineno + 1 if body else 0


@pytest.mark.parametrize("path", modules(), ids=dotted)
def test_every_module_says_what_it_is_for(path: Path) -> None:
    docstring = ast.get_docstring(ast.parse(path.read_text(encoding="utf-8")))
    assert docstring
    if path.name == "__init__.py" and path.parent != PACKAGE:
        assert "Depends on:" in docstring


@pytest.mark.parametrize(
    "path",
    [p for p in modules() if p.parent.name in {"fabgen", "stock", "theory"} or p.name == "records.py"],
    ids=dotted,
)
def test_heavy_packages_are_not_imported_at_the_top(path: Path) -> None:
    tree = ast.parse(path.read_text(encoding="utf-8"))
    for node in tree.body:
        names = [a.name for a in node.names] if isinstance(node, ast.Import) else []
        names += [node.module or ""] if isinstance(node, ast.ImportFrom) else []
        assert not [name for name in names if name.split(".")[0] in HEAVY], f"{path.name}, line {node.lineno}"


def test_the_wheel_holds_every_package() -> None:
    import tomllib

    setup = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["tool"]["setuptools"]
    found = {dotted(path) for path in PACKAGE.rglob("__init__.py")}
    assert set(setup["packages"]) == found | {"fabgen.templates"}


def test_every_data_file_is_in_the_wheel() -> None:
    import tomllib

    data = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["tool"]["setuptools"]["package-data"]
    for path in PACKAGE.rglob("*"):
        if path.is_file() and path.suffix not in {".py", ".md"} and "__pycache__" not in path.parts:
            package = ".".join(path.parent.relative_to(ROOT).parts)
            assert any(path.match(pattern) for pattern in data.get(package, [])), f"{path.name} is not in the wheel"


def test_the_page_for_developers_shows_these_layers() -> None:
    text = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    cells = re.findall(r"^\| (`.*?`) \|", text, re.MULTILINE)
    shown = [{f"fabgen.{name}" for name in re.findall(r"`([^`]+)`", cell)} for cell in cells]
    assert shown == [set(row) - {"fabgen", "fabgen.__main__"} for row in LAYERS]


def test_the_cad_kernel_is_loaded_before_netgen() -> None:
    """Netgen brings an older copy of the kernel; loaded first, it serves both and changes solids and STEP files."""
    for path in modules():
        lines = [line.strip() for line in path.read_text(encoding="utf-8").splitlines()]
        for number, line in enumerate(lines):
            if re.match(r"(from|import) netgen", line):
                before = lines[max(0, number - 2) : number]
                assert any(text.startswith("import OCP") for text in before), f"{path.name}:{number + 1}"
