"""The command line: exit codes, one sentence for a refusal, no traceback, no Qt."""

from __future__ import annotations

import json
import math
import os
import subprocess
import sys
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from PIL import Image

from app.calculator import work_out
from app.chart import values_document
from app.command_line import main
from app.reading import Reading, save_reading
from app.reading.journal import append_to_journal
from app.version import software_version
from imaging import GridNotFound, Picture, SheetMap
from tests.app.chart.chart_examples import full_reading, picture_file, upright_map

REPOSITORY = Path(__file__).resolve().parent.parent.parent
Say = Callable[[], tuple[str, str]]


@pytest.fixture
def picture(tmp_path: Path) -> Picture:
    return picture_file(tmp_path / "scan é 1.png")


@pytest.fixture
def reading_path(tmp_path: Path, picture: Picture) -> Path:
    path = tmp_path / "scan é 1.reading.json"
    save_reading(full_reading(picture), path, picture.path)
    return path


@pytest.fixture
def said(capsys: pytest.CaptureFixture[str]) -> Say:
    """What went to standard output and to standard error since the last look."""

    def look() -> tuple[str, str]:
        captured = capsys.readouterr()
        return captured.out, captured.err

    return look


@pytest.fixture
def grids(monkeypatch: pytest.MonkeyPatch) -> dict[str, SheetMap | GridNotFound | Exception]:
    """What is found on a picture, by its file name; without an entry a good grid."""
    found: dict[str, SheetMap | GridNotFound | Exception] = {}

    def find(picture: Picture) -> SheetMap | GridNotFound:
        answer = found.get(picture.file_name, upright_map(picture.size_px))
        if isinstance(answer, Exception):
            raise answer
        return answer

    monkeypatch.setattr("imaging.find_grid", find)
    return found


def refused_with(code: int, errors: str) -> str:
    """The one sentence of a refusal."""
    assert code == 2
    assert errors.startswith("smallsquare: ")
    assert errors.count("\n") == 1
    assert "Traceback" not in errors
    return errors


def program(*words: str, **options: Any) -> subprocess.CompletedProcess[str]:
    """The program in a fresh interpreter."""
    return subprocess.run(
        [sys.executable, "-m", "app.command_line", *words],
        cwd=REPOSITORY,
        capture_output=True,
        encoding="utf-8",
        timeout=60,
        check=False,
        **options,
    )


def test_the_grid_of_a_picture_is_told(picture: Picture, said: Say, grids: object) -> None:
    assert main(["grid", str(picture.path)]) == 0
    out, errors = said()
    assert out.startswith(str(picture.path))
    assert "8.000 px per small square along the paper" in out
    assert "Standard error of a point: at most" in out
    assert "Scale (1 mm or 5 mm): certain." in out
    assert "Bold lines seen every fifth line." in out
    assert errors == ""


def test_the_grid_of_a_real_page_is_the_one_it_was_drawn_with(said: Say) -> None:
    page = REPOSITORY / "sample_scans" / "twelve_lead_25.jpg"
    truth = json.loads(page.with_suffix(".truth.json").read_text(encoding="utf-8"))
    (x_px, _, _), (y_px, _, _) = truth["px_from_mm"]
    assert main(["grid", "--json", str(page)]) == 0
    grid = json.loads(said()[0])["pictures"][0]["grid"]
    assert grid["x_pitch_px_per_mm"] == pytest.approx(math.hypot(x_px, y_px), rel=2e-4)
    assert grid["scale_is_certain"] is True


def test_the_grid_for_other_programs(picture: Picture, said: Say, grids: object) -> None:
    assert main(["grid", "--json", str(picture.path)]) == 0
    document = json.loads(said()[0])
    assert document["schema_version"] == 1
    assert document["software_version"] == software_version()
    (one,) = document["pictures"]
    assert one["sha256"] == picture.sha256
    assert one["grid"]["x_pitch_px_per_mm"] == 8.0
    assert one["grid"]["scale_is_certain"] is True
    assert one["refusal"] == ""


def test_each_of_several_pictures_is_reported(
    tmp_path: Path,
    picture: Picture,
    said: Say,
    grids: dict[str, SheetMap | GridNotFound | Exception],
) -> None:
    plain = picture_file(tmp_path / "plain.png", (64, 48)).path
    grids["plain.png"] = GridNotFound("No grid lines are seen.", "no_lines")
    broken = picture_file(tmp_path / "broken.png", (64, 48)).path
    grids["broken.png"] = RuntimeError("never seen before")
    words = [str(plain), str(tmp_path / "gone.png"), str(broken), str(picture.path)]
    assert main(["grid", *words]) == 2
    out, errors = said()
    assert out.startswith(str(picture.path))
    lines = errors.splitlines()
    assert len(lines) == 3
    assert "plain.png: No grid lines are seen." in lines[0]
    assert "“gone.png” was not found" in lines[1]
    assert "broken.png: something went wrong" in lines[2]
    assert "never seen before" not in errors
    assert main(["grid", "--json", *words]) == 2
    reports = json.loads(said()[0])["pictures"]
    assert [report["code"] for report in reports] == ["no_lines", "no_picture", "unexpected", ""]
    assert [report["grid"] is None for report in reports] == [True, True, True, False]
    assert reports[0]["refusal"] == "No grid lines are seen."


def test_of_a_file_with_pages_the_first_is_taken(tmp_path: Path, said: Say, grids: object) -> None:
    pages = [Image.new("RGB", (64, 48), (250, tint, tint)) for tint in (230, 240)]
    pages[0].save(tmp_path / "two.tif", save_all=True, append_images=pages[1:])
    assert main(["grid", str(tmp_path / "two.tif")]) == 0
    assert "two.tif, page 1 of 2" in said()[0]


def test_values_are_printed_with_their_uncertainty_and_cautions(
    reading_path: Path, picture: Picture, said: Say
) -> None:
    assert main(["values", str(reading_path)]) == 0
    out, errors = said()
    assert errors == ""
    assert "QRS" in out
    assert " ± " in out
    for value in work_out(full_reading(picture)):
        assert all(caution.text in out for caution in value.cautions)


def test_values_for_other_programs(reading_path: Path, picture: Picture, said: Say) -> None:
    assert main(["values", str(reading_path), "--json"]) == 0
    out = said()[0]
    # Only ASCII, so that no terminal's encoding can spoil it.
    assert out.isascii()
    assert json.loads(out) == values_document(full_reading(picture))


@pytest.mark.parametrize("what", ["moved", "changed"])
def test_values_of_a_reading_without_its_picture_say_so(
    reading_path: Path, picture: Picture, said: Say, what: str
) -> None:
    assert picture.path is not None
    if what == "moved":
        picture.path.unlink()
    else:
        picture.path.write_bytes(b"another")
    assert main(["values", str(reading_path)]) == 0
    out, errors = said()
    assert "QRS" in out
    assert errors.count("\n") == 1
    assert ("no longer where it was" if what == "moved" else "has changed since") in errors
    target = reading_path.with_name("out.png")
    sentence = refused_with(main(["annotate", str(reading_path), "-o", str(target)]), said()[1])
    assert "scan é 1.png" in sentence
    assert not target.exists()


def test_edits_that_were_never_saved_are_said_to_be_left_out(
    reading_path: Path, picture: Picture, said: Say
) -> None:
    reading = full_reading(picture)
    append_to_journal(reading_path, reading)
    assert main(["values", str(reading_path)]) == 0
    assert said()[1] == ""
    append_to_journal(reading_path, replace(reading, calipers=()))
    assert main(["values", str(reading_path)]) == 0
    out, errors = said()
    assert "QRS" in out
    assert "edits made after scan é 1.reading.json was last saved are left out" in errors
    assert errors.count("\n") == 1


def test_the_annotated_picture_is_written(reading_path: Path, said: Say) -> None:
    target = reading_path.with_name("out.png")
    assert main(["annotate", str(reading_path), "-o", str(target)]) == 0
    assert said() == ("", "")
    with Image.open(target) as image:
        assert image.width >= 1200
        assert image.height > 900


def test_a_file_there_already_is_replaced_only_by_force(reading_path: Path, said: Say) -> None:
    target = reading_path.with_name("out.png")
    target.write_bytes(b"precious")
    code = main(["annotate", str(reading_path), "-o", str(target)])
    assert "is there already" in refused_with(code, said()[1])
    assert target.read_bytes() == b"precious"
    assert main(["annotate", str(reading_path), "-o", str(target), "--force"]) == 0
    assert target.read_bytes() != b"precious"


def test_not_even_force_writes_to_an_original(
    reading_path: Path, picture: Picture, said: Say
) -> None:
    assert picture.path is not None
    for original in (picture.path, reading_path):
        before = original.read_bytes()
        code = main(["annotate", str(reading_path), "-o", str(original), "--force"])
        refused_with(code, said()[1])
        assert original.read_bytes() == before


@pytest.mark.parametrize("command", [["values"], ["annotate", "-o", "out.png"]])
@pytest.mark.parametrize("content", [None, b"", b"{}", b"\xff\xfe", b'{"kind": "smallsquare read'])
def test_what_is_no_reading_is_one_sentence(
    tmp_path: Path, said: Say, command: list[str], content: bytes | None
) -> None:
    path = tmp_path / "no.reading.json"
    if content is not None:
        path.write_bytes(content)
    assert "no.reading.json" in refused_with(main([*command, str(path)]), said()[1])


@pytest.mark.parametrize(
    "words",
    [["grid"], ["values"], ["annotate", "a.json"], ["a.png", "b.png"], ["--wrong"], ["grid", "-x"]],
)
def test_wrong_words_are_one_sentence(words: list[str], said: Say) -> None:
    with pytest.raises(SystemExit) as ended:
        main(words)
    assert isinstance(ended.value.code, int)
    assert "--help" in refused_with(ended.value.code, said()[1])


@pytest.mark.parametrize("words", [["--help"], ["grid", "--help"], ["annotate", "--help"]])
def test_help_is_no_refusal(words: list[str], said: Say) -> None:
    with pytest.raises(SystemExit) as ended:
        main(words)
    assert ended.value.code == 0
    assert "smallsquare" in said()[0]


def test_help_names_every_command_and_how_to_open_a_file_called_like_one(said: Say) -> None:
    with pytest.raises(SystemExit):
        main(["--help"])
    out = said()[0]
    for words in ("grid PICTURE...", "values READING", "annotate READING -o", "./grid"):
        assert words in out


def test_the_version(said: Say) -> None:
    with pytest.raises(SystemExit) as ended:
        main(["--version"])
    assert ended.value.code == 0
    assert said()[0] == f"{software_version()}\n"


@pytest.mark.parametrize(
    ("words", "path"),
    [([], None), (["scan.png"], "scan.png"), (["./grid"], "./grid"), (["--", "values"], "values")],
)
def test_the_window_opens_with_what_is_named(
    monkeypatch: pytest.MonkeyPatch, words: list[str], path: str | None
) -> None:
    opened: list[str | None] = []

    def run(named: str | None) -> int:
        opened.append(named)
        return 7

    monkeypatch.setattr("app.screen_check.screen_trouble", lambda: "")
    monkeypatch.setattr("app.window.main.run", run)
    assert main(words) == 7
    assert opened == [path]


def test_no_window_is_tried_where_there_is_no_screen(
    monkeypatch: pytest.MonkeyPatch, said: Say
) -> None:
    monkeypatch.setattr("app.screen_check.screen_trouble", lambda: "There is no screen here.")
    monkeypatch.setattr("app.window.main.run", lambda _: pytest.fail("a window was tried"))
    assert "There is no screen here." in refused_with(main(["scan.png"]), said()[1])


def test_a_window_that_cannot_be_loaded_is_one_sentence(
    monkeypatch: pytest.MonkeyPatch, said: Say
) -> None:
    def run(_: str | None) -> int:
        raise ImportError("libshiboken6 is not there")

    monkeypatch.setattr("app.screen_check.screen_trouble", lambda: "")
    monkeypatch.setattr("app.window.main.run", run)
    assert "libshiboken6 is not there" in refused_with(main([]), said()[1])


@pytest.mark.parametrize(
    ("error", "words"),
    [(RuntimeError("secret detail"), "nobody foresaw"), (MemoryError(), "not enough memory")],
)
def test_what_nobody_foresaw_is_one_sentence(
    monkeypatch: pytest.MonkeyPatch, reading_path: Path, said: Say, error: Exception, words: str
) -> None:
    def fail(_: Reading) -> str:
        raise error

    monkeypatch.setattr("app.chart.values_as_text", fail)
    sentence = refused_with(main(["values", str(reading_path)]), said()[1])
    assert words in sentence
    assert "secret detail" not in sentence


def test_an_interruption_ends_without_words(
    monkeypatch: pytest.MonkeyPatch, reading_path: Path, said: Say
) -> None:
    def interrupt(_: Reading) -> str:
        raise KeyboardInterrupt

    monkeypatch.setattr("app.chart.values_as_text", interrupt)
    assert main(["values", str(reading_path)]) == 130
    assert said() == ("", "")


def test_details_are_in_the_log_when_asked_for(tmp_path: Path) -> None:
    gone = str(tmp_path / "gone.reading.json")
    quiet, verbose = program("values", gone), program("values", "--verbose", gone)
    assert "No such file" not in refused_with(quiet.returncode, quiet.stderr)
    assert verbose.returncode == 2
    assert "No such file" in verbose.stderr
    assert quiet.stderr in verbose.stderr


@pytest.mark.parametrize("words", [["--verbose"], ["--verbose", "a.png"], ["a.png", "--verbose"]])
def test_the_window_tells_more_too_when_asked(
    words: list[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """What a fault's sentence advises is accepted by every command."""
    asked: list[bool] = []
    opened: list[object] = []
    monkeypatch.setattr("app.screen_check.screen_trouble", lambda: "")
    monkeypatch.setattr("app.window.main.run", lambda path: opened.append(path) or 0)
    monkeypatch.setattr("app.command_line._set_up_log", lambda *, verbose: asked.append(verbose))
    assert main(words) == 0
    assert main([word for word in words if word != "--verbose"]) == 0
    assert asked == [True, False]
    assert opened == ["a.png" if "a.png" in words else None] * 2


def test_no_qt_is_loaded_by_the_commands(reading_path: Path) -> None:
    script = """
import sys
from app.command_line import main
folder, picture, reading = sys.argv[1:]
codes = [main(["grid", picture]), main(["values", reading]),
         main(["annotate", reading, "-o", folder + "/out.png"])]
print("codes", codes[1:], any(name.startswith("PySide6") for name in sys.modules))
"""
    picture_path = reading_path.with_name("scan é 1.png")
    ended = subprocess.run(
        [
            sys.executable,
            "-c",
            script,
            str(reading_path.parent),
            str(picture_path),
            str(reading_path),
        ],
        cwd=REPOSITORY,
        capture_output=True,
        encoding="utf-8",
        timeout=60,
        check=True,
    )
    assert ended.stdout.splitlines()[-1] == "codes [0, 0] False"


@pytest.mark.skipif(os.name != "posix", reason="needs a POSIX pipe")
def test_a_reader_that_has_enough_is_no_error(reading_path: Path) -> None:
    reading_end, writing_end = os.pipe()
    os.close(reading_end)
    ended = subprocess.run(
        [sys.executable, "-m", "app.command_line", "values", str(reading_path)],
        cwd=REPOSITORY,
        stdout=writing_end,
        stderr=subprocess.PIPE,
        timeout=60,
        check=False,
    )
    os.close(writing_end)
    assert (ended.returncode, ended.stderr) == (0, b"")


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="needs /dev/full")
def test_output_that_cannot_be_written_is_one_sentence(reading_path: Path) -> None:
    with Path("/dev/full").open("wb") as full:
        ended = subprocess.run(
            [sys.executable, "-m", "app.command_line", "values", str(reading_path)],
            cwd=REPOSITORY,
            stdout=full,
            stderr=subprocess.PIPE,
            encoding="utf-8",
            timeout=60,
            check=False,
        )
    assert "could not be written" in refused_with(ended.returncode, ended.stderr)


def test_a_terminal_without_the_letters_still_shows_the_values(reading_path: Path) -> None:
    environment = {**os.environ, "PYTHONIOENCODING": "ascii", "PYTHONUTF8": "0"}
    ended = program("values", str(reading_path), env=environment)
    assert ended.returncode == 0
    assert r"\xb1" in ended.stdout
    as_json = program("values", "--json", str(reading_path), env=environment)
    assert json.loads(as_json.stdout)["values"][0]["key"] == "rate"


def test_a_picture_of_another_size_is_refused(reading_path: Path, picture: Picture) -> None:
    """The file's bytes are the same, but this version decodes it to another size."""
    reading = full_reading(picture)
    size_px = (1000, 900)
    assert reading.sheet_map is not None
    other = replace(
        reading,
        picture=replace(reading.picture, size_px=size_px),
        sheet_map=replace(reading.sheet_map, picture_size_px=size_px),
    )
    save_reading(other, reading_path, picture.path)
    ended = program("annotate", str(reading_path), "-o", str(reading_path.with_name("o.png")))
    assert "not as large as" in refused_with(ended.returncode, ended.stderr)
