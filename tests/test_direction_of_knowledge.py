"""Knowledge points one way, and no Qt is loaded below the window.

imaging  <-  app.reading  <-  app.calculator, app.drawing  <-  app.chart  <-  app.window
"""

from __future__ import annotations

import subprocess
import sys
import tomllib
from pathlib import Path
from typing import Any

import pytest

REPOSITORY = Path(__file__).resolve().parent.parent
WITHOUT_QT = (
    "imaging",
    "app.reading",
    "app.calculator",
    "app.drawing",
    "app.chart",
    "app.command_line",
    "app.screen_check",
)


def lint(folder: Path) -> subprocess.CompletedProcess[str]:
    """Check the contracts that a folder's pyproject states; no cache is written."""
    script = (
        "import sys; sys.path.insert(0, '.');"
        "from importlinter.cli import lint_imports;"
        "sys.exit(lint_imports(no_cache=True, config_filename='pyproject.toml'))"
    )
    return subprocess.run(
        [sys.executable, "-c", script],
        cwd=folder,
        capture_output=True,
        text=True,
        timeout=60,
        check=False,
    )


def contracts() -> dict[str, Any]:
    """What our own pyproject tells the linter."""
    project = tomllib.loads((REPOSITORY / "pyproject.toml").read_text(encoding="utf-8"))
    linter: dict[str, Any] = project["tool"]["importlinter"]
    return linter


def test_the_contracts_are_kept() -> None:
    ended = lint(REPOSITORY)
    assert ended.returncode == 0, ended.stdout
    assert f"{len(contracts()['contracts'])} kept, 0 broken" in ended.stdout


def test_the_contracts_name_every_part_below_the_window() -> None:
    forbidding = [
        c for c in contracts()["contracts"] if "PySide6" in c.get("forbidden_modules", [])
    ]
    without_qt = {module for contract in forbidding for module in contract["source_modules"]}
    assert without_qt == {"imaging", "app.reading", "app.calculator", "app.drawing", "app.chart"}
    (layers,) = [c["layers"] for c in contracts()["contracts"] if c["type"] == "layers"]
    assert layers == [
        "app.window",
        "app.chart",
        "app.drawing | app.calculator",
        "app.reading",
        "imaging",
    ]


@pytest.mark.parametrize(
    ("module", "line"),
    [
        ("imaging/pixels.py", "import app.reading"),
        ("imaging/pixels.py", "from PySide6 import QtGui"),
        ("app/reading/marks.py", "import app.calculator"),
        ("app/calculator/rate.py", "def late():\n    from PySide6 import QtCore"),
        ("app/chart/panel.py", "import app.window"),
    ],
)
def test_a_violation_is_found(tmp_path: Path, module: str, line: str) -> None:
    parts = (
        "imaging",
        "app",
        "app/reading",
        "app/calculator",
        "app/drawing",
        "app/chart",
        "app/window",
    )
    for part in parts:
        (tmp_path / part).mkdir()
        (tmp_path / part / "__init__.py").touch()
    # Only what is stated for the linter, so that the same contracts judge other packages.
    ours = (REPOSITORY / "pyproject.toml").read_text(encoding="utf-8")
    stated = ours[ours.index("[tool.importlinter]") :]
    (tmp_path / "pyproject.toml").write_text(stated, encoding="utf-8")
    assert lint(tmp_path).returncode == 0
    (tmp_path / module).write_text(f"{line}\n", encoding="utf-8")
    ended = lint(tmp_path)
    assert ended.returncode == 1, ended.stdout + ended.stderr
    assert "0 broken" not in ended.stdout
    assert module.removesuffix(".py").replace("/", ".") in ended.stdout


@pytest.mark.parametrize("module", WITHOUT_QT)
def test_no_qt_is_loaded_by(module: str) -> None:
    assert loaded_with(module) == "False"


def test_qt_is_seen_where_it_is_loaded() -> None:
    assert loaded_with("app.window.main_window") == "True"


def loaded_with(module: str) -> str:
    """Whether a fresh interpreter has Qt after importing a module."""
    script = (
        f"import sys, {module};"
        "print(any(name.partition('.')[0] == 'PySide6' for name in sys.modules))"
    )
    return subprocess.run(
        [sys.executable, "-c", script],
        cwd=REPOSITORY,
        capture_output=True,
        text=True,
        timeout=60,
        check=True,
    ).stdout.strip()
