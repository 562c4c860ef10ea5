"""Commands and exit codes; everything heavier than click is imported when a command runs."""

import functools
import importlib.util
import os
import shutil
import sys
import time
import traceback
from collections.abc import Callable, Iterator, Mapping
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from edgeplan import __version__
from edgeplan.errors import InputError
from edgeplan.outputs import (
    STDOUT,
    print_whole,
    refuse_clashes,
    refuse_inputs,
    writable,
    write_whole,
)
from edgeplan.reports import FORMATS, ONE_NET_FORMATS, render

if TYPE_CHECKING:
    from edgeplan.results import Results

    Command = Callable[..., Any]

PASS, NOT_JUDGED, INTERRUPTED = 0, 2, 130
PICTURES = (".svg", ".png")
DRIVER_FORMATS = ("table", "toml", "json", "csv")
SCHEMAS = ("board", "net-list", "results")
EXITS = "Exit: 0 every judged net {}, 1 some {}, or undecided, 2 could not judge, 130 interrupted."
_THREADS = ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS")
_PATIENCE_S = 2.0  # a run that ends sooner shows no progress


class FormatAndPath(click.ParamType[tuple[str, Path]]):
    """``FORMAT=PATH`` of ``--write``."""

    name = "FORMAT=PATH"

    def __init__(self, formats: Mapping[str, str]) -> None:
        self.formats = formats

    def convert(
        self, value: Any, param: click.Parameter | None, ctx: click.Context | None
    ) -> tuple[str, Path]:
        """Split at the first equals sign; the format must be known, the place writable."""
        form, equals, path = str(value).partition("=")
        if form not in self.formats:
            self.fail(f"no format {form!r}; there are {', '.join(self.formats)}", param, ctx)
        if not equals or not path:
            self.fail(f"write {form}=PATH", param, ctx)
        return form, writable(Path(path))


def _output(_ctx: click.Context, _param: click.Parameter, value: Path) -> Path:
    """Check ``--output`` before anything is computed."""
    return writable(value)


def _processes(_ctx: click.Context, _param: click.Parameter, value: int) -> int:
    """Several processes need the package that starts them."""
    if value > 1 and importlib.util.find_spec("joblib") is None:
        raise click.BadParameter("more than 1 needs joblib: pip install 'edgeplan[parallel]'")
    return value


def _cache(_ctx: click.Context, _param: click.Parameter, value: bool) -> None:
    """Tell this process and those it starts whether to remember field solutions."""
    os.environ["EDGEPLAN_CACHE"] = "1" if value else "0"


def _picture(_ctx: click.Context, _param: click.Parameter, value: Path | None) -> Path | None:
    """Check ``--plot`` before anything is computed."""
    if value is not None and value.suffix.lower() not in PICTURES:
        raise click.BadParameter(f"{value}: a picture ends in {' or '.join(PICTURES)}")
    return None if value is None else writable(value)


_PATH: Any = click.Path(path_type=Path)
_BOARD = click.argument("board", type=click.Path(exists=True, path_type=Path))
_OUTPUT = click.option(
    "--output", "-o", type=_PATH, default="-", callback=_output, metavar="PATH",
    help="File for the result instead of the standard output.",
)  # fmt: skip


def _judging(formats: Mapping[str, str], first: str) -> "Callable[[Command], Command]":
    """Give a command the options of a run; no two results may go to one file."""
    options = (
        click.option("--format", type=click.Choice(list(formats)), default=first,
                     show_default=True, help="How the result is written."),
        _OUTPUT,
        click.option("--write", type=FormatAndPath(formats), multiple=True,
                     help="One more format of the same run, in a file; repeatable."),
        click.option("--undecided", type=click.Choice(["fail", "warn"]),
                     help="What an undecided net does to the exit code; the board file's policy "
                          "without it."),
        click.option("--jobs", type=click.IntRange(min=1), default=1, metavar="N",
                     callback=_processes, show_default=True,
                     help="Processes to share the work among."),
        click.option("--cache/--no-cache", default=True, envvar="EDGEPLAN_CACHE", callback=_cache,
                     expose_value=False, show_default=True,
                     help="Remember field solutions of lines in the user's cache folder."),
        click.option("--quiet", "-q", is_flag=True, help="Nothing but errors beside the result."),
        click.option("--color", type=click.Choice(["auto", "always", "never"]), default="auto",
                     show_default=True, help="Colour repeats a verdict; NO_COLOR is honoured."),
    )  # fmt: skip

    def decorate(command: "Command") -> "Command":
        @functools.wraps(command)
        def checked(**given: Any) -> Any:
            paths = (given["output"], given.get("plot"), *(path for _, path in given["write"]))
            refuse_clashes(path for path in paths if path is not None)
            given["form"] = given.pop("format")  # the option's name makes its EDGEPLAN_ variable
            return command(**given)

        return functools.reduce(lambda inner, option: option(inner), reversed(options), checked)

    return decorate


@click.group(context_settings={"auto_envvar_prefix": "EDGEPLAN", "max_content_width": 100})
@click.version_option(__version__, prog_name="edgeplan")
def main() -> None:
    """How slow may each edge of a board be, how fast, and what puts it in between.

    BOARD is a folder with board.toml and nets.csv, or the path of its board.toml.
    """
    # Blocks are small and run in processes of their own (--jobs); threads of the linear algebra
    # would only fight for the same cores. They read this when numpy loads, so it stands here.
    for name in _THREADS:
        os.environ.setdefault(name, "1")


@main.command(epilog=EXITS.format("can be inside", "cannot"))
@_BOARD
@_judging(FORMATS, "table")
def plan(board: Path, undecided: str | None, jobs: int, quiet: bool, **wanted: Any) -> int:
    """Find windows, proposals and remedies for every net."""
    from edgeplan.plan import plan as judge

    with _progress(quiet=quiet) as told:
        results = judge(board, undecided=undecided, jobs=jobs, progress=told)
    return _deliver(results, quiet=quiet, **wanted)


@main.command(epilog=EXITS.format("is inside", "are not"))
@_BOARD
@_judging(FORMATS, "table")
def check(board: Path, undecided: str | None, jobs: int, quiet: bool, **wanted: Any) -> int:
    """Judge every net as drawn."""
    from edgeplan.plan import check as judge

    with _progress(quiet=quiet) as told:
        results = judge(board, undecided=undecided, jobs=jobs, progress=told)
    return _deliver(results, quiet=quiet, **wanted)


@main.command(epilog=EXITS.format("can be inside", "cannot"))
@_BOARD
@click.argument("net")
@click.option("--plot", type=_PATH, callback=_picture, metavar="PATH",
              help="Draw waveforms, spectrum and windows; .svg or .png.")  # fmt: skip
@_judging(ONE_NET_FORMATS, "text")
def explain(
    board: Path, net: str, undecided: str | None, jobs: int, quiet: bool, **wanted: Any
) -> int:
    """Show one NET in full, with every rejected candidate."""
    from edgeplan.plan import explain as judge

    with _progress(quiet=quiet) as told:
        results = judge(board, net, undecided=undecided, jobs=jobs, progress=told)
    return _deliver(results, quiet=quiet, **wanted)


@main.command(epilog="Exit: 0 printed, 2 no such limit line.")
@click.argument("limit_id", metavar="[ID]", required=False)
@_OUTPUT
def limits(limit_id: str | None, output: Path) -> int:
    """List the shipped limit lines, or print one."""
    from edgeplan import limits as shipped

    try:
        text = shipped.describe(limit_id) if limit_id else shipped.listing()
    except ValueError as error:
        raise click.BadParameter(str(error), param_hint="ID") from error
    return _put({output: f"{text}\n".encode()}, quiet=True)


def _a_number(context: click.Context, parameter: click.Parameter, value: float) -> float:
    """Refuse what compares with nothing."""
    if value != value:
        raise click.BadParameter("nan is not a number of ohms", context, parameter)
    return value


@main.command(epilog="Exit: 0 printed, 2 the file, or with --strict a part of it, is not in order.")
@click.argument("file", type=click.Path(exists=True, path_type=Path))
@click.option(
    "--impedance",
    type=click.FloatRange(1, 1000),
    callback=_a_number,
    default=50.0,
    show_default=True,
    metavar="OHM",
    help="Of the line, where resistances are read off the tables.",
)
@click.option("--component", metavar="NAME", help="Whose pins and package count.")
@click.option(
    "--models",
    metavar="PATTERN",
    help="Models that fit, such as 'dq_*', are the settings of one driver.",
)
@click.option(
    "--format",
    type=click.Choice(DRIVER_FORMATS),
    default="table",
    show_default=True,
    help="How the result is written; toml is ready for board.toml.",
)
@click.option("--strict", is_flag=True, help="Errors and notes about the file end the command.")
@click.option("--quiet", "-q", is_flag=True, help="No notes about the file.")
@_OUTPUT
def drivers(file: Path, strict: bool, quiet: bool, output: Path, **wanted: Any) -> int:
    """List the drivers and settings of a model FILE (IBIS)."""
    from edgeplan import driver_text
    from edgeplan.readers import ibis

    reading = ibis.read_file(file)
    told = [*reading.errors, *reading.notes]
    if strict and told:
        raise InputError(told)
    text = driver_text.of_file(reading.models, form=wanted.pop("format"), **wanted)
    refuse_inputs({reading.models.sha256}, {output: b""})
    if told and not quiet:
        _say(_shown(str(InputError(told))))
    return _put({output: _bytes(text)}, quiet=quiet)


@main.command(epilog="Exit: 0 written, 2 nothing written.")
@click.argument("directory", metavar="DIR", type=_PATH)
def start(directory: Path) -> int:
    """Write a small commented board into the folder DIR."""
    from edgeplan import starter

    starter.write(directory)
    _say(f"next: edgeplan plan {directory}")
    return PASS


@main.command(epilog="Exit: 0 printed, 2 no such schema.")
@click.argument("name", type=click.Choice(SCHEMAS), required=False)
@_OUTPUT
def schema(name: str | None, output: Path) -> int:
    """Print the JSON schema of the inputs and the results, or one."""
    from edgeplan import schemas

    return _put({output: _bytes(schemas.text(name))}, quiet=True)


@contextmanager
def _progress(*, quiet: bool) -> Iterator[Callable[[str, float], None] | None]:
    """Give a run something to report to: on a terminal, after a while, unless quiet."""
    if quiet or sys.stderr is None or not sys.stderr.isatty():
        yield None
        return
    begin, shown = time.monotonic(), False

    def told(stage: str, share: float) -> None:
        nonlocal shown
        if time.monotonic() - begin > _PATIENCE_S:
            shown = True
            _say(f"\r{stage} {share:.0%}\x1b[K", line=False)

    try:
        yield told
    finally:
        if shown:
            _say("\r\x1b[K", line=False)


def _deliver(
    results: "Results",
    *,
    form: str,
    output: Path,
    write: list[tuple[str, Path]],
    color: str,
    quiet: bool,
    plot: Path | None = None,
) -> int:
    """Render everything, then write everything; the verdicts give the exit code."""
    from edgeplan import verdicts

    colour = _coloured(color, output)
    text = render(results, form, width=_columns(output), colour=colour)
    contents = {path: _bytes(render(results, other)) for other, path in write}
    if plot is not None:
        from edgeplan.reports import pictures

        contents[plot] = pictures.draw(results, plot.suffix)
    contents[output] = _bytes(text)
    refuse_inputs({entry.sha256 for entry in results.inputs}, contents)
    _put(contents, quiet=quiet)
    return verdicts.exit_code(results)


def _bytes(text: str) -> bytes:
    """Encode a report; the same bytes whatever the terminal's own encoding is."""
    return text.encode("utf-8", "backslashreplace")


def _coloured(color: str, output: Path) -> bool:
    """Decide on colour: the option, then NO_COLOR, FORCE_COLOR and the terminal."""
    if color == "auto":
        forced = bool(os.environ.get("FORCE_COLOR"))
        colour = not os.environ.get("NO_COLOR") and (forced or _on_terminal(output))
    else:
        colour = color == "always"
    click.get_current_context().color = colour  # click itself reads neither variable
    return colour


def _on_terminal(output: Path) -> bool:
    """Whether a person sees the result directly."""
    return output == STDOUT and sys.stdout is not None and sys.stdout.isatty()


def _columns(output: Path) -> int | None:
    """Columns of the terminal; none elsewhere, so that files do not depend on it."""
    return shutil.get_terminal_size().columns if _on_terminal(output) else None


def _put(contents: Mapping[Path, bytes], *, quiet: bool) -> int:
    """Write files first, then the standard output, whose reader may be gone."""
    for path, content in contents.items():
        if path != STDOUT:
            write_whole(path, content)
            if not quiet:
                _say(f"wrote {path}")
    if STDOUT in contents:
        print_whole(contents[STDOUT])
    return PASS


def _say(text: str, *, line: bool = True) -> None:
    """Tell the person something beside the result; nobody may be listening."""
    try:
        click.echo(text, nl=line, err=True)
    except OSError:
        return


def _shown(text: str) -> str:
    """Return a message in which names from files cannot act on the terminal."""
    from edgeplan.reports.phrases import inert

    return "\n".join(inert(line) for line in text.split("\n"))


def _complaint(error: click.ClickException) -> str:
    """Return what was wrong with the command, and where its help is."""
    if isinstance(error, click.exceptions.NoArgsIsHelpError):
        return error.format_message()
    context = error.ctx if isinstance(error, click.UsageError) else None
    hint = "" if context is None else f"\ntry: {context.command_path} --help"
    return f"error: {error.format_message()}{hint}"


def _code() -> int:
    """Run the command line; 1 means findings and nothing else, whatever stops a run is 2."""
    try:
        return int(main(prog_name="edgeplan", standalone_mode=False) or PASS)
    except click.ClickException as error:
        _say(_shown(_complaint(error)))
    except InputError as error:
        _say(_shown(str(error)))
    except (click.Abort, KeyboardInterrupt):
        return INTERRUPTED
    except OSError as error:
        place = f"{error.filename}: {error.strerror}" if error.filename else str(error)
        _say(_shown(f"error: {place}"))
    except Exception:  # noqa: BLE001 - an uncaught exception would end in 1, which means findings
        traceback.print_exc()
    return NOT_JUDGED


def run() -> None:
    """Entry point of the command ``edgeplan``."""
    sys.exit(_code())
