"""A folder imports only those above it; heavy libraries only where they belong; the checker imports nothing outside."""

import ast
import sys
from pathlib import Path

import pytest

PACKAGE = Path(__file__).parents[1] / "ultibound"
ORDER = [
    "claim", "polynomial", "stepmap", "bounding", "stance", "positivity", "contraction", "certificate",
    "prove", "tuning", "report", "examples", "cli",
]  # fmt: skip
MODULES = sorted(p for p in PACKAGE.rglob("*.py"))


def imported(path: Path) -> set[str]:
    """Full names of the modules a file imports, relative ones resolved."""
    home = ["ultibound", *path.relative_to(PACKAGE).parent.parts]
    found = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            found |= {a.name for a in node.names}
        elif isinstance(node, ast.ImportFrom):
            base = home[: len(home) - node.level + 1] if node.level else []
            module = ".".join([*base, *([node.module] if node.module else [])])
            found |= {f"{module}.{a.name}" for a in node.names} if not node.module else {module}
    return found


def layer(name: str) -> str:
    return name.split(".")[1] if "." in name else ""


def test_every_layer_is_known() -> None:
    found = {p.relative_to(PACKAGE).parts[0].removesuffix(".py") for p in MODULES} - {"__init__", "checker"}
    assert found <= set(ORDER)
    assert {"claim", "stepmap", "bounding", "certificate", "prove", "cli"} <= found


@pytest.mark.parametrize("path", MODULES, ids=lambda p: str(p.relative_to(PACKAGE)))
def test_imports_only_from_above(path: Path) -> None:
    mine = path.relative_to(PACKAGE).parts[0].removesuffix(".py")
    for name in imported(path):
        if not name.startswith("ultibound"):
            if name.split(".")[0] == "sympy":
                assert mine in ("stepmap", "report"), f"{path} imports sympy"
            if name.split(".")[0] == "matplotlib":
                assert path.name == "figures.py", f"{path} imports matplotlib"
            if name.split(".")[0] == "cvxpy":
                assert mine in ("positivity", "contraction"), f"{path} imports cvxpy"
            continue
        other = layer(name)
        if mine == "checker":
            assert other == "checker", f"the checker imports {name}"
        elif mine != "__init__" and other != "checker" and other != mine:
            assert ORDER.index(other) < ORDER.index(mine), f"{path} imports {name} from below"


@pytest.mark.parametrize("path", MODULES, ids=lambda p: str(p.relative_to(PACKAGE)))
def test_solvers_load_only_where_used(path: Path) -> None:
    for node in ast.parse(path.read_text(encoding="utf-8")).body:
        names = [a.name for a in node.names] if isinstance(node, ast.Import) else []
        names += [node.module or ""] if isinstance(node, ast.ImportFrom) else []
        assert not {n.split(".")[0] for n in names} & {"cvxpy", "scipy", "matplotlib"}, f"{path} loads a solver at once"


def test_the_checker_needs_the_standard_library_alone() -> None:
    for path in (PACKAGE / "checker").rglob("*.py"):
        for name in imported(path):
            root = name.split(".")[0]
            assert root == "ultibound" or root in sys.stdlib_module_names, f"{path} imports {name}"
        tree = ast.parse(path.read_text(encoding="utf-8"))
        assert not any(isinstance(n, ast.Assert) for n in ast.walk(tree)), f"{path}: -O would drop an assert"
        called = {n.func.id for n in ast.walk(tree) if isinstance(n, ast.Call) and isinstance(n.func, ast.Name)}
        assert not called & {"float", "eval", "exec"}, path


@pytest.mark.xfail(
    reason="6,800 lines, of which 1,113 read the whole claim format, 1,700 are about continuous stances and 1,200 about several states; the limit is to be met or stated anew"
)
def test_the_checker_can_be_read_in_a_day() -> None:
    lines = sum(len(p.read_text(encoding="utf-8").splitlines()) for p in (PACKAGE / "checker").rglob("*.py"))
    assert 500 < lines <= 3000
