"""The program as its user meets it: a real X server, real keys and a real pointer.

Tests on Qt's offscreen platform have missed what only a window system shows: focus, plug-ins,
file dialogs.
"""

from __future__ import annotations

import json
import os
import shutil
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from contextlib import suppress
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest

REPOSITORY = Path(__file__).resolve().parent.parent.parent
SAMPLE = REPOSITORY / "sample_scans" / "twelve_lead_25.jpg"
COMMAND = [sys.executable, "-m", "app.command_line"]
PATIENCE_S = 60.0
SCREEN = "1366x768x24"

missing = [name for name in ("Xvfb", "xdotool") if shutil.which(name) is None]
pytestmark = pytest.mark.skipif(
    bool(missing), reason=f"needs {' and '.join(missing)}: apt-get install xvfb xdotool"
)


@dataclass(frozen=True, slots=True)
class Screen:
    """A virtual screen and the hands on it."""

    environment: dict[str, str]

    def hand(self, *words: str) -> str:
        """One xdotool command; what it answers."""
        finished = subprocess.run(
            ["xdotool", *words],
            env=self.environment,
            capture_output=True,
            text=True,
            timeout=20.0,
            check=False,
        )
        return finished.stdout.strip()

    def window(self, title: str) -> str:
        """Wait for a window with these words in its title, and give it the keyboard."""
        number = wait_for(
            lambda: self.hand("search", "--onlyvisible", "--name", title), f"a window {title}"
        ).split()[-1]
        self.hand("windowfocus", "--sync", number)
        return number

    def keys(self, *names: str) -> None:
        """Press keys, one after the other."""
        self.hand("key", "--delay", "60", *names)

    def click(self, window: str, x_share: float, y_share: float) -> None:
        """Click at a place given as a share of the window's size."""
        sizes = self.hand("getwindowgeometry", "--shell", window).split()
        numbers = dict(line.split("=") for line in sizes)
        x, y = int(x_share * int(numbers["WIDTH"])), int(y_share * int(numbers["HEIGHT"]))
        self.hand("mousemove", "--window", window, str(x), str(y))
        # Time for the move to arrive before the press.
        time.sleep(0.1)
        self.hand("click", "1")
        time.sleep(0.1)


def wait_for(look: Callable[[], Any], what: str) -> Any:
    """The first answer that says something, within a minute."""
    ends = time.monotonic() + PATIENCE_S
    while time.monotonic() < ends:
        answer = look()
        if answer:
            return answer
        time.sleep(0.2)
    pytest.fail(f"waited {PATIENCE_S:.0f} s in vain for {what}")


def content_of(path: Path) -> dict[str, Any]:
    """A reading file as JSON; empty while it is not there."""
    if not path.exists():
        return {}
    content: dict[str, Any] = json.loads(path.read_text(encoding="utf-8"))
    return content


@pytest.fixture
def screen(tmp_path: Path) -> Iterator[Screen]:
    """A virtual screen of our own."""
    reading_end, writing_end = os.pipe()
    server = subprocess.Popen(
        ["Xvfb", "-displayfd", str(writing_end), "-screen", "0", SCREEN, "-nolisten", "tcp"],
        pass_fds=[writing_end],
        stderr=subprocess.DEVNULL,
    )
    os.close(writing_end)
    with os.fdopen(reading_end) as numbers:
        display = numbers.readline().strip()
    if not display:
        server.wait(10.0)
        pytest.skip("Xvfb found no display to open here")
    home = tmp_path / "home"
    home.mkdir()
    environment = {
        **os.environ,
        "DISPLAY": f":{display}",
        "QT_QPA_PLATFORM": "xcb",
        "HOME": str(home),
        "XDG_CONFIG_HOME": str(home),
        "PYTHONPATH": str(REPOSITORY),
    }
    environment.pop("WAYLAND_DISPLAY", None)
    yield Screen(environment)
    server.terminate()
    server.wait(10.0)


def start(screen: Screen, file: Path) -> subprocess.Popen[str]:
    """Start the program from the command line."""
    return subprocess.Popen(
        [*COMMAND, str(file)],
        env=screen.environment,
        cwd=file.parent,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
    )


def end(program: subprocess.Popen[str]) -> None:
    """Make sure that nothing is left running."""
    with suppress(ProcessLookupError):
        program.kill()
    program.communicate(timeout=20.0)


def save_until(screen: Screen, window: str, path: Path, is_there: Callable[[], Any]) -> None:
    """Press the save key until the file holds what it should; the first time a name is asked."""

    def try_once() -> bool:
        screen.hand("windowfocus", "--sync", window)
        screen.keys("ctrl+s")
        time.sleep(0.4)
        if screen.hand("search", "--onlyvisible", "--name", "Save the reading"):
            screen.window("Save the reading")
            screen.keys("Return")
            time.sleep(0.4)
        return path.exists() and bool(is_there())

    wait_for(try_once, f"{path.name} to be saved")


def test_from_the_command_line_to_a_filed_reading_and_back(screen: Screen, tmp_path: Path) -> None:
    folder = tmp_path / "chart of one"
    folder.mkdir()
    sample = Path(shutil.copy(SAMPLE, folder))
    reading_path = folder / "twelve_lead_25.reading.json"
    program = start(screen, sample)
    try:
        window = screen.window("twelve_lead_25")
        save_until(
            screen, window, reading_path, lambda: content_of(reading_path)["sheet_map"] is not None
        )
        screen.hand("windowfocus", "--sync", window)
        screen.keys("n")
        for x_share in (0.2, 0.3, 0.4):
            screen.click(window, x_share, 0.6)
        screen.keys("Return")
        save_until(
            screen, window, reading_path, lambda: len(content_of(reading_path)["calipers"]) == 2
        )
        # One more edit, and the power goes.
        screen.keys("t")
        screen.click(window, 0.2, 0.7)
        screen.click(window, 0.3, 0.7)
        journal = folder / ".twelve_lead_25.reading.json.journal"
        wait_for(journal.exists, "the journal")
        saved = reading_path.read_bytes()
        program.send_signal(signal.SIGKILL)
        program.wait(20.0)
    finally:
        end(program)
    assert reading_path.read_bytes() == saved
    assert sample.read_bytes() == SAMPLE.read_bytes()
    assert [c["quantity"] for c in content_of(reading_path)["calipers"]] == ["rr", "rr"]

    again = start(screen, reading_path)
    try:
        screen.window("Edits after the last save")
        screen.keys("Return")
        window = screen.window("twelve_lead_25.reading.json")
        save_until(
            screen, window, reading_path, lambda: len(content_of(reading_path)["calipers"]) == 3
        )
        assert not journal.exists()
        screen.keys("ctrl+q")
        _, errors = again.communicate(timeout=PATIENCE_S)
    finally:
        end(again)
    assert again.returncode == 0
    assert "Traceback" not in errors
    # Nothing was written but what was asked for.
    assert {path.name for path in folder.iterdir()} == {sample.name, reading_path.name}
