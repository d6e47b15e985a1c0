"""The library as a notebook user meets it."""

import ast
import subprocess
import sys
from pathlib import Path

import pytest

import armeval

HEAVY = ("pandas", "numba", "pinocchio", "pint", "matplotlib", "scipy", "pyarrow", "typer", "numpy")


@pytest.mark.parametrize("name", armeval.__all__)
def test_every_exported_name_can_be_had(name):
    assert getattr(armeval, name) is not None


def test_a_wrong_name_is_an_attribute_error():
    with pytest.raises(AttributeError, match="forecast"):
        armeval.forecast  # noqa: B018


def test_type_checkers_and_python_see_the_same_names():
    stub = ast.parse(Path(armeval.__file__).with_suffix(".pyi").read_text(encoding="utf-8"))
    imported = {a.name for node in stub.body if isinstance(node, ast.ImportFrom) for a in node.names}
    assert imported == set(armeval.__all__)
    assert imported <= set(dir(armeval))


def _imported_by(code: str) -> set[str]:
    done = subprocess.run(
        [sys.executable, "-c", f"import sys\n{code}\nprint(' '.join(sys.modules), file=sys.stderr)"],
        capture_output=True,
        text=True,
        check=True,
    )
    return set(done.stderr.split())


def test_importing_the_package_imports_nothing_heavy():
    assert not _imported_by("import armeval").intersection(HEAVY)


def test_help_imports_nothing_heavy():
    code = "sys.argv = ['armeval', '--help']\nfrom armeval.cli import main\ntry:\n    main()\nexcept SystemExit: pass"
    assert not _imported_by(code).intersection(set(HEAVY) - {"typer"})
