"""The import arrows of DEVELOPERS.md, read from the source with `ast`."""

import ast
import subprocess
import sys
from pathlib import Path

import pytest

import substrate

ROOT = Path(substrate.__file__).parent
FREE = {"constants", "errors", "quantity", "threads", "_kernels"}
ORDER = ["medium", "particle", "green", "source", "solve", "observe", "question", "run"]
ALLOWED = {
    "medium": set(),
    "particle": {"medium"},
    "green": {"medium"},
    "source": {"medium", "green"},
    "solve": {"medium", "particle", "green", "source"},
    "observe": {"medium", "particle", "green", "source", "solve"},
    "question": {"medium", "particle", "green", "source", "solve", "observe"},
    "run": {"medium", "particle", "green", "source", "solve", "observe", "question"},
    "picture": {"run"},
    "command": {"run", "picture", "medium"},
    "__main__": {"command"},
    "__init__": set(),
}
# package: files (relative to the package folder) that may import it
ONLY_IN = {
    "numba": lambda path: path.name == "_kernels.py",
    "matplotlib": lambda path: path.parts[0] == "picture",
    "h5py": lambda path: path == Path("run/results.py"),
    "tomllib": lambda path: path == Path("run/case.py"),
    "argparse": lambda path: path == Path("command.py"),
}
FILES = sorted(path.relative_to(ROOT) for path in ROOT.rglob("*.py") if "tables" not in path.parts)


def imported(path: Path) -> set[str]:
    """Dotted names of every module that a file imports, anywhere in it."""
    names = set()
    for node in ast.walk(ast.parse((ROOT / path).read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            names |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path} imports relatively"
            names.add(node.module)
            names |= {f"{node.module}.{alias.name}" for alias in node.names}
    return names


@pytest.mark.parametrize("path", FILES, ids=str)
def test_arrows(path):
    folder = path.parts[0] if len(path.parts) > 1 else path.stem
    for name in imported(path):
        parts = name.split(".")
        if parts[0] == "substrate" and len(parts) > 1:
            other = parts[1]
            if other in FREE or other == folder or other.startswith("__"):
                continue
            assert folder not in FREE, f"{path} imports {name}"
            assert other in ALLOWED[folder], f"{path} imports {name}"
            if folder == "picture":
                assert parts[1:3] == ["run", "results"], f"{path} imports {name}"
        elif parts[0] in ONLY_IN:
            assert ONLY_IN[parts[0]](path), f"{path} imports {parts[0]}"


@pytest.mark.parametrize("path", FILES, ids=str)
def test_only_the_command_prints(path):
    calls = [
        node
        for node in ast.walk(ast.parse((ROOT / path).read_text(encoding="utf-8")))
        if isinstance(node, ast.Call) and isinstance(node.func, ast.Name) and node.func.id == "print"
    ]
    assert not calls or path == Path("command.py")


def test_a_new_interpreter_imports_the_command_without_heavy_packages():
    """So that `substrate --help` answers at once."""
    code = "import sys, substrate.command; print(sorted(m for m in ('numpy','scipy','numba','matplotlib','h5py','mpmath') if m in sys.modules))"
    out = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert out.stdout.strip() == "[]"
