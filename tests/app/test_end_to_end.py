"""The program as its user meets it: a real X server, real keys and a real pointer.

Tests on Qt's offscreen platform have missed what only a window system shows: focus, plug-ins,
file dialogs.
"""

from __future__ import annotations

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
from PIL import Image

from app.calculator import measure_caliper
from app.reading import Caliper, load_reading
from app.reading.journal import read_journal

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

    def place(self, window: str, x_share: float, y_share: float) -> tuple[int, int]:
        """A place given as a share of the window's size, in screen pixels."""
        lines = self.hand("getwindowgeometry", "--shell", window).split()
        numbers = {name: int(value) for name, value in (line.split("=") for line in lines)}
        return (
            numbers["X"] + int(x_share * numbers["WIDTH"]),
            numbers["Y"] + int(y_share * numbers["HEIGHT"]),
        )

    def move(self, x: int, y: int) -> None:
        """Put the pointer somewhere."""
        self.hand("mousemove", str(x), str(y))
        # Time for the move to arrive before what follows it.
        time.sleep(0.1)

    def click(self, x: int, y: int) -> None:
        """Click somewhere."""
        self.move(x, y)
        self.hand("click", "1")
        time.sleep(0.1)

    def drag(self, first: tuple[int, int], second: tuple[int, int]) -> None:
        """Drag with the left button."""
        self.move(*first)
        self.hand("mousedown", "1")
        time.sleep(0.1)
        self.move((first[0] + second[0]) // 2, (first[1] + second[1]) // 2)
        self.move(*second)
        self.hand("mouseup", "1")
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


@pytest.fixture
def screen(tmp_path: Path) -> Iterator[Screen]:
    """A virtual screen of our own."""
    reading_end, writing_end = os.pipe()
    # By itself the server starts anew whenever its last client has gone, and refuses those who
    # come meanwhile.
    options = ["-screen", "0", SCREEN, "-nolisten", "tcp", "-noreset"]
    server = subprocess.Popen(
        ["Xvfb", "-displayfd", str(writing_end), *options],
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


def draw_scale_box(screen: Screen, first: tuple[int, int], second: tuple[int, int]) -> None:
    """Measure, Give the scale by hand, and drag the box; leaves the question for the counts."""

    def try_once() -> str:
        screen.keys("alt+m")
        # A menu that is not open yet does not hear its letters.
        time.sleep(0.5)
        screen.keys("s")
        screen.drag(first, second)
        time.sleep(0.5)
        return screen.hand("search", "--onlyvisible", "--name", "Give the scale by hand")

    wait_for(try_once, "the question how many squares")
    screen.window("Give the scale by hand")


def calipers_in(path: Path, quantity: str | None) -> list[Caliper]:
    """The calipers of a quantity in a reading file."""
    return [item for item in load_reading(path).calipers if item.quantity == quantity]


def test_from_the_command_line_to_a_filed_reading_and_back(screen: Screen, tmp_path: Path) -> None:
    folder = tmp_path / "chart of one"
    folder.mkdir()
    sample = Path(shutil.copy(SAMPLE, folder))
    reading_path = folder / "twelve_lead_25.reading.json"
    program = start(screen, sample)
    try:
        window = screen.window("twelve_lead_25")
        save_until(
            screen, window, reading_path, lambda: load_reading(reading_path).sheet_map is not None
        )
        screen.hand("windowfocus", "--sync", window)
        x, y = screen.place(window, 0.3, 0.6)
        screen.move(x, y)
        # One picture pixel on one screen pixel, so that what is placed is known.
        screen.keys("1", "n")
        for step in (0, 90, 190):
            screen.click(x + step, y)
        screen.keys("Return")
        save_until(screen, window, reading_path, lambda: len(calipers_in(reading_path, "rr")) == 2)
        # One more edit, and the power goes.
        screen.keys("t")
        screen.click(x, y + 60)
        screen.click(x + 120, y + 60)
        journal = folder / ".twelve_lead_25.reading.json.journal"
        wait_for(journal.exists, "the journal")
        last = wait_for(lambda: read_journal(reading_path), "the edit in the journal")
        saved = reading_path.read_bytes()
        program.send_signal(signal.SIGKILL)
        program.wait(20.0)
    finally:
        end(program)
    assert reading_path.read_bytes() == saved
    assert sample.read_bytes() == SAMPLE.read_bytes()
    widths_px = [abs(c.end.x_px - c.start.x_px) for c in calipers_in(reading_path, "rr")]
    assert widths_px == pytest.approx([90.0, 100.0], abs=1.0)

    again = start(screen, reading_path)
    try:
        screen.window("Edits after the last save")
        screen.keys("Return")
        window = screen.window("twelve_lead_25.reading.json")
        save_until(screen, window, reading_path, lambda: calipers_in(reading_path, None))
        assert load_reading(reading_path) == last
        (free,) = calipers_in(reading_path, None)
        assert abs(free.end.x_px - free.start.x_px) == pytest.approx(120.0, abs=1.0)
        assert not journal.exists()
        screen.keys("ctrl+q")
        _, errors = again.communicate(timeout=PATIENCE_S)
    finally:
        end(again)
    assert again.returncode == 0
    assert "Traceback" not in errors
    # Nothing was written but what was asked for.
    assert {path.name for path in folder.iterdir()} == {sample.name, reading_path.name}


def test_without_a_grid_the_scale_is_given_by_hand_and_the_picture_filed(
    screen: Screen, tmp_path: Path
) -> None:
    picture = tmp_path / "plain.png"
    Image.new("RGB", (1600, 900), "white").save(picture)
    reading_path = tmp_path / "plain.reading.json"
    filed = tmp_path / "plain.annotated.png"
    program = start(screen, picture)
    try:
        window = screen.window("plain.png")
        # A name once, so that the saves after it ask nothing.
        save_until(screen, window, reading_path, lambda: True)
        screen.hand("windowfocus", "--sync", window)
        x, y = screen.place(window, 0.2, 0.5)
        screen.move(x, y)
        screen.keys("1")
        draw_scale_box(screen, (x, y), (x + 400, y + 200))
        screen.keys("1", "0", "Tab", "5", "Return")
        save_until(
            screen, window, reading_path, lambda: load_reading(reading_path).sheet_map is not None
        )
        screen.hand("windowfocus", "--sync", window)
        screen.keys("t")
        screen.click(x, y)
        screen.click(x + 160, y)
        save_until(screen, window, reading_path, lambda: calipers_in(reading_path, None))
        screen.hand("windowfocus", "--sync", window)
        screen.keys("ctrl+e")
        screen.window("Save the annotated picture")
        screen.keys("Return")
        wait_for(filed.exists, "the annotated picture")
        screen.hand("windowfocus", "--sync", window)
        screen.keys("ctrl+q")
        _, errors = program.communicate(timeout=PATIENCE_S)
    finally:
        end(program)
    assert program.returncode == 0
    assert "Traceback" not in errors
    reading = load_reading(reading_path)
    assert reading.sheet_map is not None
    # 400 by 200 px over 10 by 5 large squares: 8 px to a small one.
    pitches = reading.sheet_map.x_pitch_px_per_mm, reading.sheet_map.y_pitch_px_per_mm
    assert pitches == pytest.approx((8.0, 8.0), abs=0.05)
    (span,) = measure_caliper(reading, *reading.calipers)
    # 160 px are 20 small squares: 800 ms at 25 mm/s.
    assert span.value == pytest.approx(800.0, abs=10.0)
    assert {caution.code for caution in span.cautions} >= {"scale_by_hand", "speed_unconfirmed"}
    with Image.open(filed) as image:
        assert image.height > 900
