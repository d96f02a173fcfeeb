"""The command line: opens the window, or works without one.

Exit code 0: done; 2: refused, with one sentence on standard error. Nothing of Qt and nothing
heavy is loaded before it is known to be needed.
"""

from __future__ import annotations

import argparse
import io
import json
import logging
import os
import sys
from collections.abc import Callable, Sequence
from contextlib import suppress
from pathlib import Path
from typing import TYPE_CHECKING, Any, NoReturn

# Our matrices are small: a second thread brings nothing, and starting it makes numpy load twice
# as long. It is read when numpy is loaded.
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

from app.version import software_version
from imaging.errors import SmallsquareError

if TYPE_CHECKING:
    from app.reading import Reading

Json = dict[str, Any]
AddArguments = Callable[[argparse.ArgumentParser], None]
Run = Callable[[argparse.Namespace], int]

DONE, REFUSED, INTERRUPTED = 0, 2, 130
_GRID_SCHEMA_VERSION = 1
_UNEXPECTED = (
    "something went wrong that nobody foresaw, and nothing was written; the same command with "
    "--verbose tells more"
)
_COMMANDS_HELP = """\
commands that need no screen:
  smallsquare grid PICTURE... [--json]         the grid of each picture, or why none is seen
  smallsquare values READING [--json]          the values of a reading, with ± and cautions
  smallsquare annotate READING -o OUT.png      the annotated picture of a reading

  Each has its own --help. A file that is called as a command is opened as ./grid.
  Exit code 0: done; 2: refused, with one sentence on standard error.
"""

_log = logging.getLogger(__name__)


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the program; returns the exit code.

    Parameters
    ----------
    arguments : sequence of str or None
        Without the program's name; None: those it was started with.
    """
    words = list(sys.argv[1:] if arguments is None else arguments)
    _let_odd_letters_through()
    try:
        options = _parser_for(words).parse_args(words)
        _set_up_log(verbose=options.verbose)
        code: int = options.run(options)
    except SmallsquareError as error:
        return _refuse(str(error))
    except BrokenPipeError:
        # Whoever reads the output has enough: nobody is left to tell.
        _throw_output_away()
        return DONE
    except KeyboardInterrupt:
        return INTERRUPTED
    except MemoryError:
        return _refuse("there is not enough memory for this; close other programs and try again")
    except Exception as error:
        _log.error("unexpected", exc_info=error)
        return _refuse(_UNEXPECTED)
    return code


class OutputRefused(SmallsquareError):  # noqa: N818 - a refusal is an answer, not a fault
    """Standard output goes where nothing more can be written."""


class _Parser(argparse.ArgumentParser):
    """Refuses in one sentence, without a page of usage before it."""

    def error(self, message: str) -> NoReturn:
        self.exit(REFUSED, f"smallsquare: {message}; '{self.prog} --help' tells more\n")


def _parser_for(words: Sequence[str]) -> argparse.ArgumentParser:
    """The parser of a command, or the one of the window where no command comes first."""
    if words and words[0] in _COMMANDS:
        parser = _Parser(prog="smallsquare")
        commands = parser.add_subparsers(required=True)
        for name, (add, run) in _COMMANDS.items():
            command = commands.add_parser(name, description=add.__doc__, prog=f"smallsquare {name}")
            add(command)
            _add_verbose(command)
            command.set_defaults(run=run)
        return parser
    parser = _Parser(
        prog="smallsquare",
        usage="smallsquare [--verbose] [PICTURE|READING]",
        description="Measure a paper ECG: opens a window with a picture or a reading.",
        epilog=_COMMANDS_HELP,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    parser.add_argument("path", nargs="?", metavar="PICTURE|READING", help="what to open")
    _add_verbose(parser)
    parser.add_argument("--version", action="version", version=software_version())
    parser.set_defaults(run=_open_window)
    return parser


def _add_verbose(command: argparse.ArgumentParser) -> None:
    command.add_argument("--verbose", action="store_true", help="print the log to standard error")


def _add_grid(command: argparse.ArgumentParser) -> None:
    """Find the millimetre grid of pictures; of a file with several pages the first is taken."""
    command.add_argument("pictures", nargs="+", metavar="PICTURE", type=Path)
    command.add_argument("--json", action="store_true", help="for other programs")


def _add_values(command: argparse.ArgumentParser) -> None:
    """Print the values of a reading, each with its uncertainty and its cautions."""
    command.add_argument("reading", metavar="READING", type=Path)
    command.add_argument("--json", action="store_true", help="for other programs")


def _add_annotate(command: argparse.ArgumentParser) -> None:
    """Write the picture of a reading with its calipers, values and cautions as a PNG."""
    command.add_argument("reading", metavar="READING", type=Path)
    command.add_argument("-o", "--output", metavar="OUT.png", type=Path, required=True)
    command.add_argument(
        "--force", action="store_true", help="replace OUT.png if it is there (never the picture)"
    )


def _open_window(options: argparse.Namespace) -> int:
    from app.screen_check import screen_trouble

    trouble = screen_trouble()
    if trouble:
        return _refuse(trouble)
    try:
        from app.window.main import run

        return run(options.path)
    except ImportError as error:
        _log.error("the window", exc_info=error)
        return _refuse(f"the window could not be loaded ({error}); install the program again")


def _grid(options: argparse.Namespace) -> int:
    reports = [_grid_of(path, as_text=not options.json) for path in options.pictures]
    if options.json:
        _print_json(
            {
                "kind": "smallsquare grids",
                "schema_version": _GRID_SCHEMA_VERSION,
                "software_version": software_version(),
                "pictures": reports,
            }
        )
    return REFUSED if any(report["grid"] is None for report in reports) else DONE


def _grid_of(path: Path, *, as_text: bool) -> Json:
    """Look for the grid of one picture and say at once what was found."""
    from app.chart import grid_document, grid_sentences
    from imaging import GridNotFound, find_grid, open_picture

    report: Json = {"picture": str(path), "grid": None, "refusal": "", "code": ""}
    try:
        picture = open_picture(path)
        report |= {"sha256": picture.sha256, "page_number": 1, "page_count": picture.page_count}
        found = find_grid(picture)
    except SmallsquareError as error:
        _refuse(str(error))
        return {**report, "refusal": str(error), "code": "no_picture"}
    except Exception as error:
        # The pictures after this one are still to be looked at.
        _log.error("grid of %s", path, exc_info=error)
        _refuse(f"{path}: {_UNEXPECTED}")
        return {**report, "refusal": _UNEXPECTED, "code": "unexpected"}
    if isinstance(found, GridNotFound):
        _refuse(f"{path}: {found.reason}")
        return {**report, "refusal": found.reason, "code": found.code}
    if as_text:
        page = f", page 1 of {picture.page_count}" if picture.page_count > 1 else ""
        _print("\n  ".join([f"{path}{page}", *grid_sentences(found)]))
    return {**report, "grid": grid_document(found)}


def _values(options: argparse.Namespace) -> int:
    from app.chart import values_as_text, values_document
    from app.reading import check_picture

    reading = _saved_reading(options.reading)
    # The values stand by themselves, so this is said and nothing more.
    moved_or_changed = check_picture(reading.picture, options.reading).sentence
    if moved_or_changed:
        _say(moved_or_changed)
    if options.json:
        _print_json(values_document(reading))
    else:
        _print(values_as_text(reading))
    return DONE


def _annotate(options: argparse.Namespace) -> int:
    from app.chart import write_annotated
    from app.reading import PictureState, check_picture
    from imaging import open_picture

    reading = _saved_reading(options.reading)
    check = check_picture(reading.picture, options.reading)
    if check.state is not PictureState.SAME:
        return _refuse(check.sentence)
    picture = open_picture(check.path, reading.picture.page)
    write_annotated(picture, reading, options.output, overwrite=options.force)
    return DONE


def _saved_reading(path: Path) -> Reading:
    """A reading as it was last saved; edits made since are not in it, and that is said."""
    from app.reading import load_reading
    from app.reading.journal import read_journal

    reading = load_reading(path)
    later = read_journal(path)
    if later is not None and later != reading:
        _say(f"edits made after {path.name} was last saved are left out; open it to save them")
    return reading


_COMMANDS: dict[str, tuple[AddArguments, Run]] = {
    "grid": (_add_grid, _grid),
    "values": (_add_values, _values),
    "annotate": (_add_annotate, _annotate),
}


def _say(sentence: str) -> None:
    """A sentence to the user, beside the output proper."""
    print(f"smallsquare: {sentence}", file=sys.stderr)


def _refuse(sentence: str) -> int:
    _say(sentence)
    return REFUSED


def _print(text: str) -> None:
    """Output proper, out of the buffer at once: a full disk is known before the end."""
    try:
        print(text, flush=True)
    except BrokenPipeError:
        raise
    except OSError as error:
        _throw_output_away()
        reason = error.strerror or str(error)
        raise OutputRefused(f"the output could not be written: {reason}") from error


def _print_json(document: Json) -> None:
    # Plain ASCII: whatever the terminal's encoding, what arrives is JSON.
    _print(json.dumps(document, indent=1, allow_nan=False))


def _let_odd_letters_through() -> None:
    """A terminal that lacks a letter shows its number instead of ending the program."""
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            stream.reconfigure(errors="backslashreplace")


def _set_up_log(*, verbose: bool) -> None:
    """Details go to the log, which is printed only when asked for."""
    if verbose:
        logging.basicConfig(level=logging.INFO)
    elif not logging.getLogger().handlers:
        # Without any handler Python prints warnings by itself.
        logging.getLogger().addHandler(logging.NullHandler())


def _throw_output_away() -> None:
    """Keep the interpreter from failing once more when it flushes at its end."""
    with suppress(OSError, ValueError), Path(os.devnull).open("wb") as nowhere:
        os.dup2(nowhere.fileno(), sys.stdout.fileno())


if __name__ == "__main__":
    sys.exit(main())
