"""Every public function says what it takes: each quantity, its unit, and the shape of arrays.

An argument needs its words unless its annotation names a type that explains itself (a Recording,
a path, a flag). A function that documents any argument documents all of them.
"""

import ast
import re
from pathlib import Path

import pytest

PACKAGE = Path(__file__).parents[1] / "chainsim"
SECTION = re.compile(r"^(\w[\w ]*)\n-{3,}$", re.MULTILINE)
ENTRY = re.compile(r"^(\*{0,2}\w[\w, *]*?)(?: : (.*))?$")
# A bracketed unit, or words for one that is not the same for every call.
UNIT = re.compile(r"\[[^\]]+\]|dimensionless|\bunits?\b")
# Arguments that name no quantity.
UNNAMED = {"self", "cls"}


def public_functions(path: Path):
    """Public functions and methods of a module, nested ones left out."""
    tree = ast.parse(path.read_text(encoding="utf-8"))
    yield from functions_of(tree.body, "")
    for node in tree.body:
        if isinstance(node, ast.ClassDef) and not node.name.startswith("_"):
            yield from functions_of(node.body, node.name + ".")


def functions_of(body, prefix: str):
    for node in body:
        if not isinstance(node, ast.FunctionDef) or node.name.startswith("_"):
            continue
        decorators = {ast.unparse(decorator) for decorator in node.decorator_list}
        # A command documents its arguments in its help; an overload's body has its text, and a
        # validator is called by the schema.
        if is_stub(node) or any(
            re.search(r"command|overload|validator|serializer", text) for text in decorators
        ):
            continue
        yield prefix + node.name, node


def is_stub(function: ast.FunctionDef) -> bool:
    """Whether a function is only announced, as in a protocol."""
    return ast.unparse(function.body[-1]) == "..."


def arguments(function: ast.FunctionDef) -> list[ast.arg]:
    spec = function.args
    found = [*spec.posonlyargs, *spec.args, *spec.kwonlyargs]
    found += [arg for arg in (spec.vararg, spec.kwarg) if arg]
    return [arg for arg in found if arg.arg not in UNNAMED and not arg.arg.startswith("_")]


def sections(docstring: str) -> dict[str, str]:
    parts = SECTION.split(docstring)
    return dict(zip(parts[1::2], parts[2::2], strict=True))


def entries(section: str) -> dict[str, tuple[str, str]]:
    """name -> (type line, description) of a numpydoc section."""
    found: dict[str, tuple[str, str]] = {}
    names: list[str] = []
    for line in section.splitlines():
        match = ENTRY.match(line)
        if match and not line.startswith(" "):
            names = [name.strip().lstrip("*") for name in match[1].split(",")]
            found.update(dict.fromkeys(names, (match[2] or "", "")))
        else:
            for name in names:
                kind, text = found[name]
                found[name] = (kind, f"{text} {line.strip()}")
    return found


def needs_words(arg: ast.arg) -> bool:
    return arg.annotation is None or is_quantity(ast.unparse(arg.annotation))


def is_quantity(kind: str) -> bool:
    return bool(re.search(r"\bfloat\b|ndarray", kind))


def faults_of(function: ast.FunctionDef) -> list[str]:
    docstring = ast.get_docstring(function)
    if not docstring:
        return ["has no docstring"]
    parts = sections(docstring)
    documented = entries(parts.get("Parameters", ""))
    faults = []
    for arg in arguments(function):
        if arg.arg in documented:
            faults += quantity_faults(arg.arg, *documented[arg.arg])
        elif documented or needs_words(arg):
            faults.append(f"does not document {arg.arg}")
    known = {arg.arg for arg in arguments(function)}
    faults += [
        f"documents {name}, which it does not take" for name in documented if name not in known
    ]
    returned = parts.get("Returns", "").strip()
    if is_quantity(returned.split("\n", 1)[0]):
        kind, _, text = returned.partition("\n")
        faults += quantity_faults("its return value", kind, text)
    return faults


def quantity_faults(name: str, kind: str, text: str) -> list[str]:
    faults: list[str] = []
    if re.search(r"ndarray of [A-Z]+\b", kind):
        # an array of records: its dtype lists units, field by field
        return [] if "shape" in kind else [f"gives no shape for {name}"]
    has_unit = is_quantity(kind) and not re.search(r"of (bool|int|str)", kind)
    if has_unit and not UNIT.search(text):
        faults.append(f"gives no unit for {name}")
    if "ndarray" in kind and "shape" not in kind + text:
        faults.append(f"gives no shape for {name}")
    return faults


@pytest.mark.parametrize(
    "path", sorted(PACKAGE.rglob("*.py")), ids=lambda path: str(path.relative_to(PACKAGE))
)
def test_module_and_its_public_functions_are_documented(path):
    tree = ast.parse(path.read_text(encoding="utf-8"))
    assert ast.get_docstring(tree), f"{path.name} has no docstring"
    faults = [
        f"{path.name}:{function.lineno} {name} {fault}"
        for name, function in public_functions(path)
        for fault in faults_of(function)
    ]
    assert not faults, "\n".join(faults)


PARAMETER = """def f(a{annotation}):
    '''Do.

    {section}
    ----------
    a : {kind}
        {text}
    '''
"""


@pytest.mark.parametrize(
    ("source", "faults"),
    [
        ("def f(a: Path): pass", ["has no docstring"]),
        ("def f(a): 'Do.'", ["does not document a"]),
        ("def f(a: float): 'Do.'", ["does not document a"]),
        ("def f(a: Path): 'Do.'", []),
        (("", "Parameters", "float", "Size."), ["gives no unit for a"]),
        (("", "Parameters", "float", "Size [m]."), []),
        (("", "Parameters", "ndarray", "Size [m]."), ["gives no shape for a"]),
        (("", "Parameters", "ndarray, shape (n,)", "Share (dimensionless)."), []),
        (
            ("", "Returns", "float", "Size."),
            ["does not document a", "gives no unit for its return value"],
        ),
    ],
)
def test_the_rule_itself(source, faults):
    if isinstance(source, tuple):
        annotation, section, kind, text = source
        source = PARAMETER.format(annotation=annotation, section=section, kind=kind, text=text)
        source = source.replace("    a : ", "    ") if section == "Returns" else source
    assert faults_of(ast.parse(source).body[0]) == faults


def test_an_argument_that_is_not_taken_is_a_fault():
    source = PARAMETER.format(annotation="", section="Parameters", kind="str", text="Name.")
    function = ast.parse(source.replace("def f(a)", "def f(b: Path)")).body[0]
    assert faults_of(function) == ["does not document b", "documents a, which it does not take"]
