"""The rules of the house, as far as a machine can check them, and a bad example for each check to catch."""

import ast
import re
import subprocess
import sys
import tomllib
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parent.parent
PACKAGE = ROOT / "trapdesk"

LINES = 500
LONG: dict[str, str] = {
    "tests/test_house.py": "a rule is read beside the bad example it catches",
    "tests/test_resonator.py": "one circuit, and the same cases for every formula of it",
    "tests/test_rummage.py": "one search, taken apart once for all",
    "tests/test_solve.py": "one preset, solved once for all",
    "tests/test_store.py": "one text with every habit of layout, read, edited and saved",
    "tests/test_units.py": "tables of what people type",
    "tests/test_wire.py": "one engine, its solved cases kept for all",
}
"""Files allowed past the line limit, each with its reason."""

# The room of a module is its folder, or its own name at the top; a room sees only what stands here.
SEES = {
    "engine": {"engine"},
    "errors": set(),
    "design": {"engine", "errors", "design"},
    "services": {"engine", "errors", "design", "services"},
    "units": {"root", "engine", "errors", "design", "units"},
    "store": {"root", "engine", "errors", "design", "units", "store"},
    "faces": {"root", "engine", "errors", "design", "services", "units", "store", "faces", "desk"},
    "desk": {"root", "engine", "errors", "design", "services", "units", "store", "faces", "desk"},
    "root": {"root"},
    "__main__": {"root", "faces"},
}
# The folders of services, from the bottom up: each sees only what stands before it.
SERVICES = "trap feed antenna bench compare trials box hung".split()
# Only what computes or declares: nothing that reads, writes or keeps time.
ENGINE_MAY = set(
    "__future__ collections.abc copy dataclasses enum functools itertools math numpy types typing".split()
)
SERVICES_MAY_NOT = {"time", "datetime", "random"}
OUTSIDERS = {
    "pint": lambda module: module == "trapdesk.units.units",
    "textual": lambda module: room(module) == "desk",
    "plotext": lambda module: room(module) == "desk",
    "rich": lambda module: room(module) == "desk",
    "numpy": lambda module: True,
}


def module_name(path: Path) -> str:
    parts = path.relative_to(ROOT).with_suffix("").parts
    return ".".join(parts[:-1] if parts[-1] == "__init__" else parts)


MODULES = {module_name(path): path for path in sorted(PACKAGE.rglob("*.py"))}


def room(module: str) -> str:
    parts = module.split(".")
    if parts[1:3] == ["faces", "desk"]:
        return "desk"
    return parts[1] if len(parts) > 1 else "root"


def imports(source: str, module: str, is_package: bool = False) -> list[tuple[int, str]]:
    """Return (line, dotted name) of everything imported, at the top or inside a function."""
    found = []
    for node in ast.walk(ast.parse(source)):
        if isinstance(node, ast.Import):
            found += [(node.lineno, alias.name) for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            base = node.module or ""
            if node.level:
                parts = module.split(".")
                kept = parts[: len(parts) - node.level + is_package]
                base = ".".join(kept + ([node.module] if node.module else []))
            for alias in node.names:
                longer = f"{base}.{alias.name}"
                # A name imported from a package may be a module of ours: that is what is seen then.
                ours = longer in MODULES or (base == "trapdesk" and alias.name in SEES)
                found.append((node.lineno, longer if ours or longer == "collections.abc" else base))
        elif isinstance(node, ast.Call):
            called = node.func.attr if isinstance(node.func, ast.Attribute) else getattr(node.func, "id", "")
            if called in ("import_module", "__import__"):
                first = node.args[0] if node.args else None
                named = isinstance(first, ast.Constant) and isinstance(first.value, str)
                found.append((node.lineno, first.value if named else "a name made at run time"))
    return found


def seen_from_below(module: str, name: str) -> bool:
    """Whether a folder of services looks up to one that stands above it."""
    floors = [m.split(".")[2] for m in (module, name) if m.startswith("trapdesk.services.")]
    return len(floors) == 2 and SERVICES.index(floors[0]) < SERVICES.index(floors[1])


def import_faults(source: str, module: str, is_package: bool = False) -> list[str]:
    faults = []
    here = room(module)
    if here not in SEES:
        return [f"{module}: a new room; say in SEES what it may see"]
    for line, name in sorted(set(imports(source, module, is_package))):
        top = name.split(".")[0]
        if top == "trapdesk":
            allowed = room(name) in SEES[here] and not seen_from_below(module, name)
        elif here == "engine":
            allowed = top == "numpy" or name in ENGINE_MAY
        elif top in OUTSIDERS:
            allowed = OUTSIDERS[top](module)
        else:
            allowed = top in sys.stdlib_module_names and not (here == "services" and top in SERVICES_MAY_NOT)
        if not allowed:
            faults.append(f"{module}:{line} imports {name}")
    return faults


@pytest.mark.parametrize("module", MODULES)
def test_imports(module):
    path = MODULES[module]
    faults = import_faults(path.read_text("utf-8"), module, path.name == "__init__.py")
    assert not faults


@pytest.mark.parametrize(
    ("module", "source"),
    [
        ("trapdesk.engine.coils", "import scipy.special"),
        ("trapdesk.engine.coils", "import os"),
        ("trapdesk.engine.coils", "import collections"),
        ("trapdesk.engine.coils", "from trapdesk.design import Design"),
        ("trapdesk.engine.coils", "from trapdesk import design"),
        ("trapdesk.engine.coils", "from ..services import solve"),
        ("trapdesk.engine.coils", "def f():\n    import pint"),
        ("trapdesk.design.design", "from trapdesk.services.antenna.solve import solve"),
        ("trapdesk.design.parts", "from trapdesk.units import read, write"),
        ("trapdesk.services.antenna.solve", "from trapdesk import units"),
        ("trapdesk.services.antenna.solve", "from ..hung.moves import advise"),
        ("trapdesk.services.antenna.solve", "from trapdesk.store import load"),
        ("trapdesk.services.antenna.solve", "import trapdesk.faces.rows"),
        ("trapdesk.services.antenna.solve", "import scipy"),
        ("trapdesk.services.antenna.solve", "import time"),
        ("trapdesk.units.units", "import trapdesk.services.antenna.solve"),
        ("trapdesk.store.store", "import pint"),
        ("trapdesk.store.store", "from trapdesk.services import solve"),
        ("trapdesk.faces.rows", "from rich.text import Text"),
        ("trapdesk.faces.cli", "import importlib\nimportlib.import_module('textual')"),
        ("trapdesk.faces.cli", "import importlib\nimportlib.import_module(name)"),
        ("trapdesk.faces.desk.app", "import pint"),
        ("trapdesk.faces.desk.app", "import scipy"),
        ("trapdesk.helpers", ""),
    ],
)
def test_imports_catch(module, source):
    assert len(import_faults(source, module)) == 1


@pytest.mark.parametrize(
    ("module", "source"),
    [
        ("trapdesk.engine.coils", "from collections.abc import Callable\nimport numpy.typing as npt"),
        ("trapdesk.engine.coils", "from . import special\nfrom trapdesk.engine import special"),
        (
            "trapdesk.services.antenna.solve",
            "from trapdesk.engine import wire\nfrom ...design.fields import SOLVE",
        ),
        ("trapdesk.units.units", "import pint"),
        ("trapdesk.design.design", "from trapdesk.design.fields import a, b"),
        ("trapdesk.faces.cli", "from trapdesk import __version__, store"),
        ("trapdesk.faces.desk.app", "from textual.app import App\nimport plotext"),
    ],
)
def test_imports_let_pass(module, source):
    assert not import_faults(source, module)


HEAVY = {"numpy", "pint", "textual", "plotext", "rich", "scipy"}


def loaded(*arguments: str) -> tuple[subprocess.CompletedProcess, set[str]]:
    """Run a clean interpreter and return how it ended and the top names it imported."""
    command = [sys.executable, "-X", "importtime", *arguments]
    done = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, timeout=60, check=False)
    lines = [line for line in done.stderr.splitlines() if line.startswith("import time:")]
    return done, {line.rsplit("|", 1)[1].strip().split(".")[0] for line in lines}


def test_help_starts_cold():
    done, names = loaded("-m", "trapdesk", "--help")
    words = [line for line in done.stderr.splitlines() if not line.startswith("import time:")]
    assert (done.returncode, words) == (0, [])
    assert "usage" in done.stdout.lower()
    assert "trapdesk" in names
    assert not names & HEAVY


def test_cold_start_catches():
    assert loaded("-c", "import numpy.linalg")[1] & HEAVY == {"numpy"}


SECTION = re.compile(r"^(\S[^\n]*)\n-{3,}\s*$", re.MULTILINE)
COUNTED = re.compile(r"^(?!.*\b(?:str|bool)\b).*(?:float|int\b|integer|complex|array|number)")
UNIT = re.compile(r"\[[^\[\]]+\]")


def sections(docstring: str) -> dict[str, str]:
    pieces = SECTION.split(docstring)
    return dict(zip(pieces[1::2], (body.strip("\n") for body in pieces[2::2]), strict=True))


def entries(body: str) -> list[tuple[str, str]]:
    """Return (head, text) of each unindented line and the indented lines after it."""
    found: list[tuple[str, str]] = []
    for line in body.splitlines():
        if line.strip() and not line.startswith(" "):
            found.append((line, ""))
        elif found:
            found[-1] = (found[-1][0], f"{found[-1][1]}\n{line}")
    return found


def functions(tree: ast.Module) -> list[tuple[ast.FunctionDef, bool]]:
    """Return the public functions and methods, each with whether its first argument is the object.

    Properties are left out: they are values, documented with their class.
    """
    found = []
    for node in tree.body:
        if isinstance(node, ast.FunctionDef) and not node.name.startswith("_"):
            found.append((node, False))
        elif isinstance(node, ast.ClassDef) and not node.name.startswith("_"):
            for inner in node.body:
                if isinstance(inner, ast.FunctionDef) and not inner.name.startswith("_"):
                    marks = {getattr(mark, "id", getattr(mark, "attr", "")) for mark in inner.decorator_list}
                    if not marks & {"property", "cached_property"}:
                        found.append((inner, "staticmethod" not in marks))
    return found


def docstring_faults(source: str) -> list[str]:
    """Check that parameters are documented in order, and that every number says its unit."""
    faults = []
    for node, is_method in functions(ast.parse(source)):
        given = node.args
        names = [a.arg for a in [*given.posonlyargs, *given.args]][is_method:]
        names += [given.vararg.arg] if given.vararg else []
        names += [a.arg for a in given.kwonlyargs]
        names += [given.kwarg.arg] if given.kwarg else []
        parts = sections(ast.get_docstring(node) or "")
        parameters = entries(parts.get("Parameters", ""))
        heads = [head.partition(" : ") for head, _ in parameters]
        documented = [name.strip().lstrip("*") for left, _, _ in heads for name in left.split(",")]
        if documented != names:
            faults.append(f"{node.name}: documents {documented}, takes {names}")
        for (left, _, kind), (_, text) in zip(heads, parameters, strict=True):
            if not kind.strip():
                faults.append(f"{node.name}: {left} has no type")
            elif COUNTED.search(kind) and not UNIT.search(text):
                faults.append(f"{node.name}: {left} has no [unit]")
        returns = parts.get("Returns", "")
        if COUNTED.search(returns.partition("\n")[0]) and not UNIT.search(returns):
            faults.append(f"{node.name}: what it returns has no [unit]")
        if not returns and any(isinstance(n, ast.Return) and n.value is not None for n in ast.walk(node)):
            faults.append(f"{node.name}: does not say what it returns")
    return faults


ENGINE = [module for module in MODULES if room(module) == "engine"]


@pytest.mark.parametrize("module", ENGINE)
def test_engine_docstrings(module):
    faults = docstring_faults(MODULES[module].read_text("utf-8"))
    assert not faults


GOOD = '''
def area(width, *, height=1.0, name=""):
    """Return the area.

    Parameters
    ----------
    width, height : float or array
        The sides. [m], > 0
    name : str
        What it is called.

    Returns
    -------
    float or array
        The area. [m^2]
    """
    return width * height
'''


METHODS = '''
class Plate:
    """A plate."""

    @property
    def side(self):
        """Its side. [m]"""
        return self.width

    def name(self):
        """Return what it is called.

        Returns
        -------
        str or array of str
            The name.
        """
        return "plate"
'''


def test_engine_docstrings_let_pass():
    assert not docstring_faults(GOOD)
    assert not docstring_faults(METHODS)
    assert len(docstring_faults(METHODS.replace("    @property\n", ""))) == 1


@pytest.mark.parametrize(
    ("right", "wrong"),
    [
        ("width, height :", "height, width :"),
        ("width, height :", "width :"),
        ("*, height=1.0", "*more, height=1.0"),
        ("sides. [m], > 0", "sides."),
        ("area. [m^2]", "area."),
        ("    name : str", "    name"),
        ("Returns\n    -------\n", "Gives\n    -----\n"),
        ("Parameters\n", "Arguments\n"),
    ],
)
def test_engine_docstrings_catch(right, wrong):
    assert right in GOOD
    assert len(docstring_faults(GOOD.replace(right, wrong))) == 1


# A Source section cites as "key, p. 12, eq. (3)": the key begins a line or follows "; " and ends in a comma,
# a colon or a year. It may open with one of WITHOUT_KEY; a dashed word in backticks is a key in either.
NAME = re.compile(r"[a-z0-9]+(?:-[a-z0-9]+)*")
KEY = re.compile(rf"(?:^|; )`?({NAME.pattern})(?:(?<=-\d\d\d\d)(?![\w-])|`?[,:] )", re.MULTILINE)
DASHED = re.compile(r"`([a-z0-9]+(?:-[a-z0-9]+)+)`")
WITHOUT_KEY = ("derived here", "definition", "common practice", "from memory")
FIELDS = {"title": str, "author": str, "year": int, "where": str, "seen": bool, "note": str}


def source_faults(source: str, known: set[str]) -> list[str]:
    """Check the Source sections, and the values of arguments called source."""
    faults = []
    for node in ast.walk(ast.parse(source)):
        cited: set[str] = set()
        if isinstance(node, ast.keyword) and node.arg == "source" and isinstance(node.value, ast.Constant):
            value = str(node.value.value)
            cited = set() if value.lower().startswith(WITHOUT_KEY) else {value}
        elif isinstance(node, ast.Module | ast.ClassDef | ast.FunctionDef):
            text = sections(ast.get_docstring(node) or "").get("Source")
            if text is None:
                continue
            without_key = text.lower().startswith(WITHOUT_KEY)
            cited = set(DASHED.findall(text)) | (set() if without_key else set(KEY.findall(text)))
            if not cited and not without_key:
                faults.append(f"{getattr(node, 'name', 'module')}: cites no key and does not say why")
        line = getattr(node, "lineno", 1)
        faults += [f"line {line}: {key} is not in sources.toml" for key in sorted(cited - known)]
    return faults


def register_faults(register: dict) -> list[str]:
    faults = [f"{key}: not lower case words and dashes" for key in register if not NAME.fullmatch(key)]
    for key, table in register.items():
        if {name: type(value) for name, value in table.items()} != FIELDS:
            faults.append(f"{key}: wants exactly {', '.join(FIELDS)}, each of its type")
    return faults


REGISTER = tomllib.loads((PACKAGE / "sources.toml").read_text("utf-8"))


@pytest.mark.parametrize("module", MODULES)
def test_sources_known(module):
    faults = source_faults(MODULES[module].read_text("utf-8"), set(REGISTER))
    assert not faults


def test_register_of_sources():
    faults = register_faults(REGISTER)
    assert not faults


@pytest.mark.parametrize(
    ("text", "faults"),
    [
        ("grove-1900, p. 3, eq. (2)", 0),
        ("`grove-1900`, p. 3; lake-12, table 4", 0),
        ("grove-1900: linear, from 20 C", 0),
        ("Derived here: from the wave equation,\n    then, by symmetry, halved.", 0),
        ("Derived here: as in `sea-1901`, part C.", 1),
        ("Common practice, no source.", 0),
        ("grove-1900.", 0),
        ("sea-1901, p. 3", 1),
        ("sea-1901 for the section", 1),
        ("grove-1900, p. 3; `sea-1901`, p. 4", 1),
        ("grove-1900, p. 3\n    sea-1901, p. 4", 1),
        ("Everybody knows.", 1),
    ],
)
def test_sources_catch(text, faults):
    source = f'def area():\n    """Return it.\n\n    Source\n    ------\n    {text}\n    """\n'
    assert len(source_faults(source, {"grove-1900", "lake-12"})) == faults


def test_sources_catch_arguments():
    assert not source_faults('Soil(source="grove-1900")', {"grove-1900"})
    assert not source_faults('Soil(source="from memory")', {"grove-1900"})
    assert len(source_faults('Soil(source="sea-1901")', {"grove-1900"})) == 1


@pytest.mark.parametrize("change", [{"seen": "yes"}, {"year": "1900"}, {"page": 3}, {}])
def test_register_catches(change):
    good = {"title": "t", "author": "a", "year": 1900, "where": "w", "seen": True, "note": ""}
    assert not register_faults({"grove-1900": good})
    bad = good | change
    if not change:
        del bad["note"]
    assert len(register_faults({"grove-1900": bad})) == 1
    assert len(register_faults({"Grove 1900": good})) == 1


# Written in pieces, so that this file does not hold what it looks for.
FORBIDDEN = [
    re.compile(pattern)
    for pattern in (
        r"(?<![\w.])/(?:wo" r"rk|t" r"mp|ro" r"ot|ho" r"me)/",
        r"\bTO" r"DO\b",
        r"\bFIX" r"ME\b",
        r"pytest\.(?:mark\.)?(?:ski" r"p|xfa" r"il)",
        r"importor" r"skip",
        r"\bxfa" r"il\b",
        r"pragma: no " r"cover",
        r"py" r"pi\.org|python" r"hosted",
    )
]
GENERATED = {"build", "dist", "__pycache__"}


def project_files() -> list[Path]:
    """Return every file a person could commit: hidden folders other than .ci, and made ones, left out."""
    found = []
    for path in sorted(ROOT.rglob("*")):
        folders = path.relative_to(ROOT).parts[:-1]
        made = any(f in GENERATED or f.endswith(".egg-info") or (f[0] == "." and f != ".ci") for f in folders)
        # A .git that is a file belongs to a work tree kept elsewhere.
        if path.is_file() and not made and path != ROOT / ".git":
            found.append(path)
    return found


def word_faults(text: str) -> list[str]:
    lines = enumerate(text.splitlines(), start=1)
    return [
        f"line {n}: {pattern.pattern}" for n, line in lines for pattern in FORBIDDEN if pattern.search(line)
    ]


def test_forbidden_words():
    files = project_files()
    assert Path(__file__).resolve() in files
    assert ROOT / ".ci" / "run" in files
    texts = {path: path.read_bytes().decode("utf-8", errors="replace") for path in files}
    faults = {str(path.relative_to(ROOT)): word_faults(text) for path, text in texts.items()}
    assert not {name: found for name, found in faults.items() if found}


@pytest.mark.parametrize(
    "pieces",
    [
        ("open('/wo", "rk/data.toml')"),
        ("see /t", "mp/notes"),
        ("# TO", "DO: later"),
        ("# FIX", "ME"),
        ("@pytest.mark.ski", "pif(True)"),
        ("pytest.ski", "p('no')"),
        ("@pytest.mark.xfa", "il"),
    ],
)
def test_forbidden_words_catch(pieces):
    assert word_faults("".join(pieces))
    assert not word_faults(" and ".join(pieces))


def length_faults(lengths: dict[str, int], long: dict[str, str]) -> list[str]:
    faults = [f"{name}: {n} lines" for name, n in lengths.items() if n > LINES and not long.get(name)]
    return faults + [f"{name}: needs no exception" for name in long if lengths.get(name, 0) <= LINES]


def test_file_lengths():
    files = [path for path in PACKAGE.rglob("*") if path.suffix in (".py", ".tcss")]
    files += (ROOT / "tests").rglob("*.py")
    lengths = {str(path.relative_to(ROOT)): len(path.read_text("utf-8").splitlines()) for path in files}
    faults = length_faults(lengths, LONG)
    assert not faults


def test_file_lengths_catch():
    assert length_faults({"a.py": LINES + 1}, {})
    assert length_faults({"a.py": LINES + 1}, {"a.py": ""})
    assert length_faults({"a.py": LINES}, {"a.py": "a table"})
    assert not length_faults({"a.py": LINES + 1, "b.py": LINES}, {"a.py": "a table"})
