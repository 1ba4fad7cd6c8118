"""Mutation testing: changes one thing in a package, runs the tests that reach it, lists what no test notices.

    python -m tests.mutation theory --sample 60 --seed 1
    python -m tests.mutation theory --modules ring --lines 86 104

The tree is copied first; the working tree is never touched. One run with coverage tells which tests reach which line;
each mutant meets the fastest of these first, then the others, within ``--seconds`` of processor time each. Heavy
libraries are loaded once, and each mutant runs in a fork of that process. What a fixture or a cache made for an earlier
test counts for that test alone, so a survivor may still be noticed by a test that shares it.

A survivor is a missing test or a change that makes no difference: look at each. Lines of messages and annotations are
left alone, since no size depends on them.
"""

from __future__ import annotations

import argparse
import ast
import contextlib
import copy
import importlib
import io
import os
import random
import resource
import shutil
import signal
import sys
import tempfile
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any, TypeAlias

ROOT = Path(__file__).parent.parent
LIGHT = ("numpy", "scipy.optimize", "scipy.special", "hypothesis", "pydantic")
HEAVY = {"theory": LIGHT, "parts": (*LIGHT, "cadquery", "shapely"), "checks": (*LIGHT, "cadquery", "shapely")}
ARITHMETIC = {ast.Add: ast.Sub, ast.Sub: ast.Add, ast.Mult: ast.Div, ast.Div: ast.Mult, ast.Pow: ast.Mult}
NEGATED = {ast.Lt: ast.GtE, ast.LtE: ast.Gt, ast.Gt: ast.LtE, ast.GtE: ast.Lt, ast.Eq: ast.NotEq, ast.NotEq: ast.Eq}
TWINS = {"min": "max", "max": "min", "sin": "cos", "cos": "sin", "any": "all", "all": "any"}
BROKEN = 2
FIRST = 25

Reach: TypeAlias = dict[tuple[str, int], set[str]]


@dataclass(frozen=True)
class Mutant:
    """One change: the ``index``-th place of a module."""

    module: Path
    line: int
    index: int
    text: str


def _constant(node: ast.Constant) -> tuple[str, Callable[[], None]] | None:
    value = node.value
    if isinstance(value, bool):
        return f"{value} -> {not value}", lambda: setattr(node, "value", not value)
    if isinstance(value, int | float):
        new = value + 1 if isinstance(value, int) else (value * 1.1 if value else 0.1)
        return f"{value!r} -> {new!r}", lambda: setattr(node, "value", new)
    return None


def _operator(node: ast.AST) -> tuple[str, Callable[[], None]] | None:
    if isinstance(node, ast.BinOp) and type(node.op) in ARITHMETIC:
        op = ARITHMETIC[type(node.op)]()
        return f"{type(node.op).__name__} -> {type(op).__name__}", lambda: setattr(node, "op", op)
    if isinstance(node, ast.Compare) and type(node.ops[0]) in NEGATED:
        ops = [NEGATED[type(node.ops[0])](), *node.ops[1:]]
        return f"{type(node.ops[0]).__name__} -> {type(ops[0]).__name__}", lambda: setattr(node, "ops", ops)
    if isinstance(node, ast.BoolOp):
        other = ast.Or() if isinstance(node.op, ast.And) else ast.And()
        return f"{type(node.op).__name__} -> {type(other).__name__}", lambda: setattr(node, "op", other)
    if isinstance(node, ast.UnaryOp) and isinstance(node.op, ast.USub):
        return "minus taken out", lambda: setattr(node, "op", ast.UAdd())
    return None


def _change(node: ast.AST) -> tuple[str, Callable[[], None]] | None:
    """What can be changed at a node: how it reads, and the doing."""
    if isinstance(node, ast.Constant):
        return _constant(node)
    if isinstance(node, ast.Name | ast.Attribute):
        field = "id" if isinstance(node, ast.Name) else "attr"
        name = getattr(node, field)
        return (f"{name} -> {TWINS[name]}", lambda: setattr(node, field, TWINS[name])) if name in TWINS else None
    return _operator(node)


LEFT_ALONE = (ast.JoinedStr, ast.Raise, ast.Import, ast.ImportFrom)


def _places(node: ast.AST) -> Iterator[ast.AST]:
    """Nodes that may be changed, in a fixed order; annotations, decorators, messages and imports are left alone."""
    for name, value in ast.iter_fields(node):
        if name in {"annotation", "returns", "decorator_list"}:
            continue
        for child in value if isinstance(value, list) else [value]:
            if not isinstance(child, ast.AST) or isinstance(child, LEFT_ALONE):
                continue
            if _change(child) is not None:
                yield child
            yield from _places(child)


def mutants_of(module: Path) -> list[Mutant]:
    """Every mutant of a module."""
    found = []
    for index, node in enumerate(_places(ast.parse(module.read_text(encoding="utf-8")))):
        change = _change(node)
        assert change is not None
        found.append(Mutant(module, getattr(node, "lineno", 1), index, change[0]))
    return found


def source_of(mutant: Mutant) -> str:
    """The changed module."""
    tree = copy.deepcopy(ast.parse(mutant.module.read_text(encoding="utf-8")))
    node = next(place for index, place in enumerate(_places(tree)) if index == mutant.index)
    change = _change(node)
    assert change is not None
    change[1]()
    return ast.unparse(ast.fix_missing_locations(tree))


class Recorder:
    """A pytest plugin: each test's name and seconds, in a fork's or the first run's own process."""

    def __init__(self, cover: Any = None) -> None:
        self.seconds: dict[str, float] = {}
        self._cover = cover

    def pytest_runtest_logstart(self, nodeid: str) -> None:
        if self._cover is not None:
            self._cover.switch_context(nodeid)

    def pytest_runtest_logreport(self, report: Any) -> None:
        self.seconds[report.nodeid] = self.seconds.get(report.nodeid, 0.0) + report.duration


def run_tests(words: Sequence[str], recorder: Recorder | None = None) -> int:
    """pytest in this process, silent unless the unchanged tests fail."""
    import pytest

    options = ["-x", "-q", "-p", "no:randomly", "-p", "no:cacheprovider", "-m", "not slow", "-W", "ignore"]
    shown = io.StringIO()
    with contextlib.redirect_stdout(shown), contextlib.redirect_stderr(shown):
        status = int(pytest.main([*options, *words], plugins=[recorder] if recorder else []))
    if recorder is not None and status:
        print(shown.getvalue()[-4000:], flush=True)
    return status


def in_fork(work: Callable[[], int], seconds: int) -> int:
    """The result of ``work`` in a fork that may use so much processor time; a fork that dies has noticed the change."""
    process = os.fork()
    if process == 0:
        resource.setrlimit(resource.RLIMIT_CPU, (seconds, seconds + 5))
        signal.signal(signal.SIGXCPU, signal.SIG_DFL)
        try:
            os._exit(work())
        except BaseException:
            os._exit(BROKEN)
    _, status = os.waitpid(process, 0)
    return os.waitstatus_to_exitcode(status)


def reach(package: str, tests: Sequence[str]) -> tuple[Reach, dict[str, float]]:
    """Which tests reach which line of the package, and each test's seconds."""
    import coverage

    data = Path(tempfile.mkdtemp()) / "coverage"
    cover = coverage.Coverage(data_file=str(data), include=[f"fabgen/{package}/*"])
    recorder = Recorder(cover)
    cover.start()
    status = run_tests(tests, recorder)
    cover.stop()
    cover.save()
    if status:
        raise SystemExit("the tests fail before anything is changed")
    found: Reach = {}
    for name in cover.get_data().measured_files():
        for line, contexts in cover.get_data().contexts_by_lineno(name).items():
            key = (Path(name).resolve().relative_to(Path.cwd()).as_posix(), line)
            found[key] = {context for context in contexts if context}
    return found, recorder.seconds


def verdict(mutant: Mutant, tests: Sequence[Sequence[str]], seconds: int) -> bool:
    """Whether a test notices the mutant, group by group. A group that uses up its time notices nothing, but the
    first: there it is a loop without end."""
    original = mutant.module.read_text(encoding="utf-8")
    mutant.module.write_text(source_of(mutant), encoding="utf-8")
    try:
        for number, group in enumerate(tests):
            unnoticed = {0} if number == 0 else {0, -signal.SIGXCPU, -signal.SIGKILL}
            if in_fork(lambda group=group: run_tests(group), seconds) not in unnoticed:  # type: ignore[misc]
                return True
        return False
    finally:
        mutant.module.write_text(original, encoding="utf-8")


def groups_for(mutant: Mutant, reached: Reach, seconds: dict[str, float]) -> list[list[str]]:
    """The tests that reach the mutant's line, or else its module, the fastest first; in two groups."""
    name = mutant.module.as_posix()
    near = reached.get((name, mutant.line), set())
    if not near:
        near = set().union(*(tests for (module, _), tests in reached.items() if module == name))
    ordered = sorted(near, key=lambda test: seconds.get(test, 0.0))
    return [group for group in (ordered[:FIRST], ordered[FIRST:]) if group]


def copied_tree() -> Path:
    """A copy of what the tests need, made the present folder and the only place that is imported from."""
    place = Path(tempfile.mkdtemp(prefix="mutation-")).resolve()
    for name in ("fabgen", "tests", "templates", "docs", "out_examples"):
        shutil.copytree(ROOT / name, place / name, ignore=shutil.ignore_patterns("__pycache__"))
    for path in (*ROOT.glob("*.md"), ROOT / "pyproject.toml"):
        shutil.copy(path, place)
    os.chdir(place)
    for name in [name for name in sys.modules if name.split(".")[0] in {"fabgen", "tests"} and name != __name__]:
        del sys.modules[name]
    sys.path[:] = [str(place), *(p for p in sys.path if Path(p or ".").resolve() not in {ROOT, place})]
    sys.dont_write_bytecode = True
    os.environ["PYTHONPATH"] = str(place)
    return place


def chosen(package: str, names: Sequence[str], lines: Sequence[int], sample: int, seed: int) -> list[Mutant]:
    """A sample of the package's mutants, by module and line."""
    modules = sorted(Path("fabgen", package).glob("*.py"))
    every = [m for path in modules if not names or path.stem in names for m in mutants_of(path)]
    every = [m for m in every if not lines or m.line in lines]
    picked = random.Random(seed).sample(every, min(sample, len(every)))
    print(f"{package}: {len(every)} mutants, {len(picked)} of them tried (seed {seed})", flush=True)
    return sorted(picked, key=lambda m: (m.module, m.index))


def main() -> None:
    """Tries a sample and prints each survivor with its place."""
    parser = argparse.ArgumentParser(description=(__doc__ or "").partition("\n")[0])
    parser.add_argument("package", choices=("theory", "parts", "checks"))
    parser.add_argument("--modules", nargs="*", default=[], help="only these modules of the package")
    parser.add_argument("--lines", nargs="*", type=int, default=[], help="only these lines, to try a survivor again")
    parser.add_argument("--tests", nargs="*", help="test files or folders (tests/PACKAGE)")
    parser.add_argument("--sample", type=int, default=60)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--seconds", type=int, default=60, help="processor time that a mutant's tests may take")
    arguments = parser.parse_args()
    tests = arguments.tests or [f"tests/{arguments.package}"]
    place = copied_tree()
    try:
        for name in HEAVY[arguments.package]:
            importlib.import_module(name)
        picked = chosen(arguments.package, arguments.modules, arguments.lines, arguments.sample, arguments.seed)
        reached, seconds = _in_own_process(arguments.package, tests)
        survivors = 0
        unchanged = next((group for mutant in picked for group in groups_for(mutant, reached, seconds)), [])
        if unchanged and in_fork(lambda: run_tests(unchanged), 3600):
            raise SystemExit("the tests cannot be run one by one")
        for mutant in picked:
            groups = groups_for(mutant, reached, seconds)
            if not verdict(mutant, groups, arguments.seconds):
                survivors += 1
                word = f"survived {sum(map(len, groups))} tests" if groups else "survived, reached by no test"
                print(f"{mutant.module}:{mutant.line}: {mutant.text}: {word}", flush=True)
        print(f"{arguments.package}: {len(picked) - survivors} of {len(picked)} noticed", flush=True)
    finally:
        os.chdir("/")
        shutil.rmtree(place, ignore_errors=True)


def _in_own_process(package: str, tests: Sequence[str]) -> tuple[Reach, dict[str, float]]:
    """:func:`reach` in a fork, so that this process never loads the package that is to be changed."""
    import pickle

    result = Path(tempfile.mkdtemp()) / "reach"

    def work() -> int:
        result.write_bytes(pickle.dumps(reach(package, tests)))
        return 0

    if in_fork(work, 3600) != 0:
        raise SystemExit("the tests fail before anything is changed, or could not be run")
    found: tuple[Reach, dict[str, float]] = pickle.loads(result.read_bytes())
    return found


if __name__ == "__main__":
    main()
