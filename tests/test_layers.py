"""Imports point one way: from text and screen down to formulas, never back.

The order is that of DEVELOPERS.md. A folder may import itself, and what stands before it.
"""

import ast
from pathlib import Path

import pytest

PACKAGE = Path(__file__).parents[1] / "chainsim"

# From the ground up. Inside a rank, too, a name may import only what stands before it.
RANKS = (
    ("errors", "units", "closed_forms"),
    ("kernels", "scenario"),
    ("model",),
    ("integration",),
    ("recording",),
    ("analysis", "findings", "run"),
    ("study",),
    ("report",),
    ("cli",),
)
ORDER = [name for rank in RANKS for name in rank]
# Text knows nothing of arrays, and arrays nothing of text.
KEPT_APART = {("scenario", "kernels")}
# The package's face and `python -m chainsim` stand above everything.
FACE = {"__init__", "__main__"}


def modules():
    return sorted(PACKAGE.rglob("*.py"))


def layer(path: Path) -> str:
    return path.relative_to(PACKAGE).with_suffix("").parts[0]


def imported(path: Path):
    """Line, dotted module and names of every import of chainsim in a file."""
    package = "chainsim." + ".".join(path.relative_to(PACKAGE).parts[:-1])
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            for alias in node.names:
                if alias.name.split(".")[0] == "chainsim":
                    yield node.lineno, alias.name, []
        elif isinstance(node, ast.ImportFrom):
            base = node.module or ""
            if node.level:
                parents = package.rstrip(".").split(".")
                parents = parents[: len(parents) - node.level + 1]
                base = ".".join([*parents, base]).rstrip(".")
            if base.split(".")[0] == "chainsim":
                yield node.lineno, base, [alias.name for alias in node.names]


def targets(module: str, names: list[str]):
    """Layers that an import statement reaches."""
    parts = module.split(".")
    if len(parts) > 1:
        return [parts[1]]
    return [name for name in names if name in ORDER]


def wrong_way(source: str, target: str) -> bool:
    if source in FACE or source == target or target not in ORDER:
        return False
    if source == "kernels" or (source, target) in KEPT_APART:
        return True
    return ORDER.index(target) > ORDER.index(source)


def test_every_part_of_the_package_has_a_rank():
    assert {layer(path) for path in modules()} - FACE <= set(ORDER)


@pytest.mark.parametrize("path", modules(), ids=lambda path: str(path.relative_to(PACKAGE)))
def test_imports_point_down(path):
    faults = [
        f"{path.name}:{line} imports {target}, which stands above {layer(path)}"
        for line, module, names in imported(path)
        for target in targets(module, names)
        if wrong_way(layer(path), target)
    ]
    assert not faults, "\n".join(faults)


@pytest.mark.parametrize("path", modules(), ids=lambda path: str(path.relative_to(PACKAGE)))
def test_private_names_stay_in_their_folder(path):
    faults = [
        f"{path.name}:{line} imports {name} from {module}"
        for line, module, names in imported(path)
        for name in names
        if name.startswith("_")
        and not name.startswith("__")
        and layer(path) not in targets(module, names)
    ]
    assert not faults, "\n".join(faults)


@pytest.mark.parametrize(
    ("source", "target", "wrong"),
    [
        ("model", "scenario", False),
        ("model", "integration", True),
        ("scenario", "kernels", True),
        ("kernels", "errors", True),
        ("run", "findings", False),
        ("findings", "run", True),
        ("cli", "report", False),
        ("__init__", "cli", False),
    ],
)
def test_the_rule_itself(source, target, wrong):
    assert wrong_way(source, target) is wrong
