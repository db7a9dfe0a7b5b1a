"""The layout of DEVELOPERS.md, enforced: a module imports from its own layer or one above it."""

import ast
from pathlib import Path

import stress

PACKAGE = Path(stress.__file__).parent
ORDER = (
    "text",
    "finding",
    "netlist",
    "parts",
    "circuit",
    "engine",
    "study",
    "judge",
    "report",
    "pipeline",
    "command",
)
LONGEST = 350


def layer_of(path: Path) -> str:
    inner = path.relative_to(PACKAGE)
    return inner.parts[0] if len(inner.parts) > 1 else inner.stem


def imported(path: Path) -> list[str]:
    names = []
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            names += [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path.name} imports relatively"
            names.append(node.module or "")
            if node.module == "stress":
                names += [f"stress.{alias.name}" for alias in node.names]
    return names


def modules() -> list[Path]:
    return [path for path in sorted(PACKAGE.rglob("*.py")) if path != PACKAGE / "__init__.py"]


def test_imports_run_one_way():
    seen, broken, edges = set(), [], 0
    for path in modules():
        own = layer_of(path)
        seen.add(own)
        for name in imported(path):
            layers = name.split(".")
            if layers[0] != "stress" or len(layers) < 2:
                continue
            edges += 1
            if ORDER.index(layers[1]) > ORDER.index(own):
                broken.append(f"{path.relative_to(PACKAGE)} imports {name}")

    assert seen == set(ORDER)  # a check that looked at nothing must not pass
    assert edges > len(ORDER)
    assert broken == []


def test_only_their_owners_import_pint_and_pyspice():
    owners = {"pint": "text", "PySpice": "engine"}
    found = {name: set() for name in owners}
    for path in modules():
        for name in imported(path):
            top = name.split(".")[0]
            if top in owners:
                found[top].add(path)

    for top, owner in owners.items():
        assert len(found[top]) == 1, f"{top} is imported by {found[top]}"
        assert layer_of(next(iter(found[top]))) == owner


def test_files_stay_small():
    lengths = {
        str(path): len(path.read_text(encoding="utf-8").splitlines())
        for path in [*modules(), *Path(__file__).parent.rglob("*.py")]
    }
    assert len(lengths) > 20
    assert {path: n for path, n in lengths.items() if n > LONGEST} == {}
