"""The command line: each command parses, calls once, prints; errors end in one place.

Before a command runs only click and the standard library are imported, so that help is instant.
"""

from __future__ import annotations

import os
import re
import sys
from collections.abc import Callable, Iterable, Iterator, Sequence
from contextlib import contextmanager
from io import TextIOWrapper
from math import isfinite
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from irsurvey import __version__
from irsurvey.errors import IrsurveyError

if TYPE_CHECKING:
    from irsurvey.assess.criteria import SeverityClass
    from irsurvey.model import ComponentReport, Finding, FrameReport, Report

# numpy is not loaded yet.  Sums here are short: sharing one out among threads takes longer than doing it (the house
# sample 4.5 s instead of 2.1 s on two cores), and `--jobs` has the other cores.
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

ALL_DONE, SOME_FAILED, NOTHING_RUN, INTERRUPTED = 0, 1, 2, 130

ABOVE_ZERO = click.FloatRange(min=0, min_open=True, max=1e6)
_UNPRINTABLE = re.compile(r"[\x00-\x08\x0b-\x1f\x7f-\x9f]")
UNCERTAINTY = click.option(
    "--uncertainty",
    type=click.Choice(["first-order", "monte-carlo"]),
    default="first-order",
    show_default=True,
    help="How uncertainty is propagated; monte-carlo where first order is said not to do.",
)


def _finite(_context: click.Context, parameter: click.Parameter, value: float | None) -> float | None:
    if value is not None and not isfinite(value):
        raise click.BadParameter(f"{value} is not a finite number", param=parameter)
    return value


class Commands(click.Group):
    """The commands, ended in one place: one line per error on standard error, never a traceback."""

    def main(self, *args: Any, **extra: Any) -> Any:  # click's own signature is as loose
        """Run a command and leave with its exit code."""
        for stream in (sys.stdout, sys.stderr):
            if isinstance(stream, TextIOWrapper):
                stream.reconfigure(errors="replace")  # a letter the terminal lacks may not cost a run its summary
        try:
            code = super().main(*args, **extra | {"standalone_mode": False})
        except IrsurveyError as error:
            code = _complain(error.exit_code, *map(str, error.faults))
        except click.exceptions.NoArgsIsHelpError as error:
            click.echo(error.ctx.get_help(), err=True)
            code = NOTHING_RUN
        except click.ClickException as error:
            context = getattr(error, "ctx", None)
            help_at = f"; see {context.command_path} --help" if context else ""
            code = _complain(NOTHING_RUN, error.format_message().rstrip(".") + help_at)
        except click.Abort:
            code = _complain(INTERRUPTED, "stopped: every file written so far is whole, the next run starts anew")
        except Exception as error:  # the last resort: whatever it is, a user sees one line
            if os.environ.get("IRSURVEY_DEBUG"):
                raise
            where = getattr(error, "filename", None) or "irsurvey"
            what = getattr(error, "strerror", None) or f"{type(error).__name__}: {error}"
            code = _complain(NOTHING_RUN, f"{where}: {what}; IRSURVEY_DEBUG=1 shows where it happened")
        sys.exit(code or ALL_DONE)


@click.group("irsurvey", cls=Commands, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(__version__, prog_name="irsurvey")
def main() -> None:
    """From radiometric infrared frames to a defect report.

    Begin with `irsurvey start FOLDER`, fill in what it marks, then `irsurvey check` and `irsurvey run`.
    Exit codes: 0 all done; 1 done, but frames or rows failed; 2 the command or a file is wrong, nothing was run.
    """


@main.command()
@click.argument("folder", type=Path)
@click.option("--known", multiple=True, metavar="X,Y=T", help="A pixel and the temperature seen there, °C; give two.")
def start(folder: Path, known: tuple[str, ...]) -> int:
    """Look at the frames in FOLDER and write a commented survey.toml beside them.

    Every guess is marked as a guess.  Two points such as --known "240,320=21.3" tell scale, unit and byte
    order of the stored numbers: x from the left, y from the top, in the first frame or, as in
    --known "f2.tif:240,320=21.3", in a named one.
    """
    from irsurvey.start import write_start

    started = write_start(folder, known)
    for notice in started.notices:
        _tell(notice)
    frames = "1 frame" if started.frames == 1 else f"{started.frames} frames"
    _tell(f"{started.path}: {frames}; fill in the lines marked so, then irsurvey check {folder}")
    return ALL_DONE


@main.command()
@click.argument("survey", type=Path)
def check(survey: Path) -> int:
    """Read everything, run nothing: all faults at once, and what is assumed rather than measured.

    SURVEY is the survey file or its folder.
    """
    from irsurvey.run import check as check_survey

    checked = check_survey(_survey_file(survey))
    for notice in checked.notices:
        _tell(notice)
    _complain(SOME_FAILED, *(f"frame {frame} cannot be read: {reason}" for frame, reason in checked.unreadable))
    readable = len(checked.survey.tasks) - len(checked.unreadable)
    _tell(f"{survey}: no faults; {readable} of {len(checked.survey.tasks)} frames can be read")
    return SOME_FAILED if checked.unreadable else ALL_DONE


@main.command()
@click.argument("survey", type=Path)
@click.option(
    "--contrast-k", type=ABOVE_ZERO, callback=_finite, help="Difference to be read, K; default: the least that counts."
)
@click.option(
    "--size-mm", type=ABOVE_ZERO, callback=_finite, default=20, show_default=True, help="Side of a part to be read, mm."
)
def plan(survey: Path, contrast_k: float | None, size_mm: float) -> int:
    """Tell before going out what SURVEY (the survey file or its folder) will be able to show.

    No frame needs to exist.  How uncertain a temperature difference will be, in the middle of a picture and near
    a corner; from where on it can be claimed; what sizes are resolved; how uncertain U-values are; and what to
    improve first.
    """
    from irsurvey.plan import plan as plan_survey
    from irsurvey.plan.tables import remarks, tables
    from irsurvey.run import load_survey

    prospects = plan_survey(load_survey(_survey_file(survey), ahead=True), contrast=contrast_k, size=size_mm / 1e3)
    for table in tables(prospects, size_mm / 1e3):
        click.echo(table.title)
        _print_table(table.columns, table.rows)
    for remark in remarks(prospects):
        _tell(remark)
    return ALL_DONE


@main.command()
@click.argument("survey", type=Path)
@click.option("-o", "--out", type=Path, help="Folder to write to; default: report, beside the survey file.")
@click.option("--jobs", type=click.IntRange(min=1), default=1, show_default=True, help="Frames worked on at once.")
@click.option("--documents", default="html,pdf", show_default=True, help="Documents to make, joined by commas.")
@click.option("--csv-bom", is_flag=True, help="Begin the CSV tables with a byte order mark, as some spreadsheets ask.")
@click.option("--maps", default="", help="Further maps for each frame, joined by commas: heat-flux, uncertainty.")
@UNCERTAINTY
def run(survey: Path, out: Path | None, jobs: int, documents: str, csv_bom: bool, maps: str, uncertainty: str) -> int:
    """Analyse every frame of SURVEY (the survey file or its folder) and write the report."""
    from irsurvey.run import run as run_survey

    marked = ("csv-bom",) if csv_bom else ()
    chosen = {"documents": (*_names(documents), *marked), "maps": _names(maps)}
    path = _survey_file(survey)
    out = out or path.parent / "report"
    with _progress() as on_frame:
        report = run_survey(path, out, jobs=jobs, uncertainty=uncertainty, on_frame=on_frame, **chosen)
    failed = [frame for frame in report.frames if frame.status == "failed"]
    _complain(SOME_FAILED, *(f"frame {frame.id} failed: {frame.reason}" for frame in failed))
    _print_table(("frame", "label", "findings", "components", "class", "urgency", "claim"), _summary(report))
    _tell(f"report: {out / ('report.html' if 'html' in chosen['documents'] else 'report.json')}")
    return SOME_FAILED if failed else ALL_DONE


@main.command()
@click.argument("source", type=Path, metavar="IN.csv")
@click.option("-o", "--out", type=Path, required=True, metavar="OUT.csv", help="Table to write.")
@UNCERTAINTY
def readings(source: Path, out: Path, uncertainty: str) -> int:
    """Correct single spot readings, with uncertainty.

    Column apparent_c is required; emissivity, reflected_c, distance_m, air_c, relative_humidity_percent,
    pressure_hpa, band_low_um, band_high_um, window_transmittance, window_reflectance, window_c and
    window_ambient_c count where they stand, and u_… before a name is its standard uncertainty; without one
    the default counts that a survey has.  Other columns pass through.
    """
    from irsurvey.readings import correct_table

    done = correct_table(source, out, uncertainty=uncertainty)
    _complain(SOME_FAILED, *done.notices, *done.failed)
    _tell(f"{out}: {done.rows - len(done.failed)} of {done.rows} readings corrected")
    return SOME_FAILED if done.failed else ALL_DONE


@main.group()
def review() -> None:
    """What a reviewer decided about a report."""


@review.command("apply")
@click.argument("out", type=Path)
@click.argument("decisions", type=Path, metavar="DECISIONS.json")
def apply_review(out: Path, decisions: Path) -> int:
    """Put the decisions of DECISIONS.json into the report in OUT and list what is still open.

    The page of the report exports that file.  What was measured stays as it was; report.json says beside it who
    decided what, when and why, and the documents there are made again.
    """
    from irsurvey.report.review.words import InWords
    from irsurvey.review import apply

    done = apply(out, decisions)
    told = InWords(done.report)
    for status in done.gone:
        _tell(f"{status.frame} {status.id}: no longer in the report; the decision on {status.key} is kept")
    if done.open:
        _print_table(("frame", "still open", "why"), ((one.frame, one.id, told.how_open(one)) for one in done.open))
    said = f"{len(done.review.decisions)} of {done.review.reviewer}, {done.review.date}"
    _tell(f"decisions: {said}{'' if done.is_new else '; they were in the report already'}")
    if bare := done.without_reason:
        _tell(f"without a reason: {bare} rejected or reclassified")
    _tell(f"{out}: {len(done.open)} still open of {len(done.report.review_status) - len(done.gone)}")
    return ALL_DONE


@main.command()
def materials() -> int:
    """List the built-in emissivities, and the building materials of layers, with their sources."""
    from irsurvey.heat.building_materials import building_materials
    from irsurvey.radiometry.emissivity import materials as built_in

    rows = (
        (entry.name, f"{entry.emissivity:g} ± {entry.u:.1g}", entry.note, f"{entry.source} ({entry.mark})")
        for entry in built_in().values()
    )
    _print_table(("material", "emissivity ± u", "note", "source"), rows)
    layers = (
        (name, f"{one.conductivity:g}", f"{one.density:g}", f"{one.specific_heat:g}", f"{one.source} ({one.mark})")
        for name, one in building_materials().items()
    )
    _print_table(("layer of an element", "W/(m·K)", "kg/m³", "J/(kg·K)", "source"), layers)
    return ALL_DONE


@main.command()
@click.argument("survey", required=False, type=click.Path(path_type=Path))
def criteria(survey: Path | None) -> int:
    """List criteria, limits and standards.

    Criteria with their classes, urgencies and sources, those of SURVEY's own too; absolute limits of parts; the
    standards whose requirements on the conditions may count."""
    from irsurvey.assess.conditions import requirement_sets
    from irsurvey.assess.criteria import criteria as known
    from irsurvey.assess.limits import limits
    from irsurvey.constants import ZERO_CELSIUS
    from irsurvey.run import load_survey, own_criteria

    own = own_criteria(load_survey(_survey_file(survey))) if survey is not None else ()
    rows = (
        (name, entry.quantity, "\n".join(map(_interval, entry.classes)), f"{entry.source} ({entry.mark})")
        for name, entry in known(own).items()
    )
    _print_table(("criterion", "judges", "class: interval, urgency", "source"), rows)
    parts = (
        (
            name,
            f"{one.t_max - ZERO_CELSIUS:.0f} °C",
            "" if one.rise is None else f"{one.rise:g} K",
            f"{one.source} ({one.mark})",
        )
        for name, one in limits().items()
    )
    _print_table(("limit of a part", "at most", "rise at rated load", "source"), parts)
    standards = ((one.name, one.kind, ", ".join(one.methods)) for one in requirement_sets())
    _print_table(("standard", "kind", "methods"), standards)
    return ALL_DONE


@main.command()
@click.argument("which", type=click.Choice(["survey", "report"]))
def schema(which: str) -> int:
    """Print the JSON Schema of the survey file or of report.json."""
    import json

    from irsurvey.report.json import report_schema
    from irsurvey.survey.load import schema as survey_schema

    click.echo(json.dumps(survey_schema() if which == "survey" else report_schema(), indent=2, ensure_ascii=False))
    return ALL_DONE


def _complain(code: int, *lines: str) -> int:
    for line in lines:
        _tell(" ".join(line.split()), err=True)
    return code


def _tell(line: str, *, err: bool = False) -> None:
    """Print a line; names from a survey may hold characters that a terminal obeys."""
    click.echo(_printable(line), err=err)


def _printable(text: str) -> str:
    return _UNPRINTABLE.sub("\ufffd", text)


def _survey_file(path: Path) -> Path:
    return path / "survey.toml" if path.is_dir() else path


def _names(text: str) -> tuple[str, ...]:
    return tuple(name.strip() for name in text.split(",") if name.strip())


@contextmanager
def _progress() -> Iterator[Callable[[FrameReport, int], None]]:
    """A progress bar on standard error, where that is a terminal."""
    from rich.console import Console
    from rich.progress import Progress

    console = Console(stderr=True)
    with Progress(console=console, transient=True, disable=not console.is_terminal) as bar:
        frames = bar.add_task("frames", total=None)
        yield lambda _, total: bar.update(frames, advance=1, total=total)


def _summary(report: Report) -> Iterator[tuple[str, ...]]:
    """One row for each frame, the most urgent first, those that failed before those without findings."""
    from irsurvey.report.ranking import governing, in_order

    first: dict[str, Finding | ComponentReport] = {}
    for ranked in in_order(report):
        first.setdefault(ranked.frame.id, ranked.item)
    place = {frame: index for index, frame in enumerate(first)}
    for frame in sorted(report.frames, key=lambda frame: (place.get(frame.id, len(place)), frame.status == "analysed")):
        if frame.status == "failed":
            yield frame.id, frame.label, "", "", "not inspected: failed", "", ""
            continue
        compared = frame.detectable is not None and frame.detectable.min_delta_k is not None
        name, urgency = "" if compared else "nothing compared", ""
        if frame.id in first:
            governs = governing(first[frame.id].assessments)
            name = governs.class_ if governs and governs.class_ else "no class: look again"
            urgency = "" if first[frame.id].urgency is None else str(first[frame.id].urgency)
            items: tuple[Finding | ComponentReport, ...] = (*frame.findings, *frame.components)
            if urgency == "0" and any(item.outcome == "not cleared" for item in items):
                name += ", not cleared"
        yield frame.id, frame.label, str(len(frame.findings)), str(len(frame.components)), name, urgency, frame.claim


def _interval(kind: SeverityClass) -> str:
    """A class in words: its name, its interval and its urgency."""
    low = f"{'≥' if kind.holds_low else '>'} {kind.low:g}" if isfinite(kind.low) else ""
    high = f"{'≤' if kind.holds_high else '<'} {kind.high:g}" if isfinite(kind.high) else ""
    return f"{kind.name}: {' and '.join(filter(None, (low, high)))}, {kind.urgency}"


def _print_table(columns: Sequence[str], rows: Iterable[Sequence[str]]) -> None:
    """A table as wide as the terminal; in a file or pipe wide enough not to be cut."""
    from rich.box import SIMPLE
    from rich.console import Console
    from rich.table import Table

    width = None if sys.stdout.isatty() else 200
    console = Console(width=width, markup=False, highlight=False, emoji=False)
    table = Table(*columns, box=SIMPLE)
    for row in rows:
        table.add_row(*map(_printable, row))
    console.print(table)
