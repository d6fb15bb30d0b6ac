"""Survey file in, output folder out: what `irsurvey run` and `irsurvey check` wrap."""

from __future__ import annotations

import json
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass, replace
from pathlib import Path

from irsurvey import __version__, pipeline, texts
from irsurvey.analysis.checklist import present_in
from irsurvey.analysis.conditions import reviewed
from irsurvey.analysis.decisions import next_measurements
from irsurvey.analysis.repairs import repair_list
from irsurvey.analysis.seasons import seasons_of
from irsurvey.analysis.trends import populations, trend_of
from irsurvey.assess.checklist import checklist
from irsurvey.assess.conditions import overall, requirement_sets
from irsurvey.assess.criteria import criteria, criterion_faults
from irsurvey.assess.limits import limits
from irsurvey.batch import execute
from irsurvey.errors import Fault, FrameError, OutputError, SurveyError, UsageError
from irsurvey.files import PART, write_text
from irsurvey.geometry.polygons import mask
from irsurvey.heat.building_materials import building_materials
from irsurvey.heat.convection import CONVECTION
from irsurvey.heat.season import degree_days
from irsurvey.heat.sky import SKY_MODELS
from irsurvey.model import AssetReport, FrameReport, FrameTask, Quantity, Report, Survey
from irsurvey.numbers import Style
from irsurvey.radiometry.emissivity import materials
from irsurvey.readers import read
from irsurvey.report import WRITERS, frame_files, kept
from irsurvey.report.review.standing import with_reviews
from irsurvey.report.review.stored import stored
from irsurvey.report.style import asked_by
from irsurvey.survey.load import Known, load
from irsurvey.survey.outside import areas, is_drawn_on, polygon_faults
from irsurvey.survey.places import OUTPUT_MARKER

_MARKER_TEXT = "irsurvey wrote this folder; its next run writes over it. Keep nothing of your own in it.\n"
_ALWAYS = ("json", "csv", "repairs")


@dataclass(frozen=True, slots=True)
class Job:
    """One frame to read, analyse and write; picklable."""

    task: FrameTask
    out: str
    maps: tuple[str, ...]
    uncertainty: str
    style: Style


@dataclass(frozen=True, slots=True)
class Checked:
    """What `check` found beside faults: what is assumed, and frames that cannot be read."""

    survey: Survey
    notices: tuple[str, ...]
    unreadable: tuple[tuple[str, str], ...]  # frame id, reason


def run(
    survey_path: Path,
    out: Path | None = None,
    *,
    documents: tuple[str, ...] = ("html", "pdf"),
    jobs: int = 1,
    maps: tuple[str, ...] = (),
    uncertainty: str = pipeline.FIRST_ORDER,
    on_frame: Callable[[FrameReport, int], None] | None = None,
) -> Report:
    """Process a whole survey and write its report.

    `out` defaults to `report` beside the survey; `documents` names the documents to make beside report.json and
    findings.csv; `maps` may hold "heat-flux" and "uncertainty"; `uncertainty` is "first-order" or "monte-carlo";
    `on_frame` is told each finished frame and the number of all.
    Reviews that an earlier run's report in `out` was given are carried over.  Raises SurveyError, nothing run, where
    the survey is wrong; UsageError where there is no such document, map or uncertainty; OutputError where `out` belongs
    to something else, or its reviews are damaged.
    """
    for option, names, known in (
        ("documents", documents, WRITERS),
        ("maps", maps, pipeline.MAPS),
        ("uncertainty", (uncertainty,), pipeline.UNCERTAINTIES),
    ):
        if unknown := [name for name in names if name not in known]:
            raise UsageError(Fault(option, f"some of {', '.join(known)}", ", ".join(unknown)))
    survey = load_survey(survey_path)
    faults, _ = _judge_pixels(task for task in survey.tasks if is_drawn_on(task))
    if faults:
        raise SurveyError(*faults)
    out = out or Path(survey.folder) / "report"
    _claim_folder(out, {task.id for task in survey.tasks})
    reviews = stored(out)
    frames = []
    style = asked_by(json.loads(survey.as_read))
    made = [Job(task, str(out), maps, uncertainty, style) for task in _resolved(survey)]
    for frame in execute(analyse_file, made, jobs):
        frames.append(frame)
        if on_frame:
            on_frame(frame, len(survey.tasks))
    report = with_reviews(_concluded(survey, tuple(frames)), reviews)
    tasks = kept.keep(survey.tasks, out)
    for document in (*_ALWAYS, *documents):
        WRITERS[document](report, tasks, out)
    return report


def check(survey_path: Path) -> Checked:
    """Read everything, run nothing.  Raises SurveyError with all faults of the survey file."""
    survey = load_survey(survey_path)
    faults, unreadable = _judge_pixels(survey.tasks)
    if faults:
        raise SurveyError(*faults)
    return Checked(survey, survey.notices, unreadable)


def load_survey(survey_path: Path, *, ahead: bool = False) -> Survey:
    """The survey file, held against the materials, criteria and convection correlations there are.

    `ahead`: before going out, when frames, tables and logs need not be there.
    """
    known = Known(
        criteria=tuple(criteria()),
        convections=tuple(CONVECTION),
        materials={name: (material.emissivity, material.u) for name, material in materials().items()},
        standards=tuple(one.name for one in requirement_sets()),
        sky_models={name: model.u for name, model in SKY_MODELS.items()},
        building_materials={
            name: (material.conductivity, material.density, material.specific_heat)
            for name, material in building_materials().items()
        },
        degree_days=degree_days,
        limits=tuple(limits()),
        criterion_faults=criterion_faults,
    )
    survey = load(survey_path, known=known, ahead=ahead)
    criteria(own_criteria(survey))  # two files of one name, or one of a built-in's, are told before anything runs
    return survey


def analyse_file(job: Job) -> FrameReport:
    """Read one frame, analyse it and write its files; whatever is wrong with it becomes its reason to fail."""
    task = job.task
    try:
        frame = read(Path(task.path), task.read)
        if task.window_frames:
            task = _with_window(task)
        partner = read(Path(task.pair.partner.path), task.pair.partner.read) if task.pair else None
        report, maps = pipeline.analyse(frame, task, partner=partner, maps=job.maps, uncertainty=job.uncertainty)
        frame_files.write(report, maps, Path(job.out), style=job.style)
        kept.keep_photograph(task, Path(job.out))
    except FrameError as error:
        return pipeline.failed(task, str(error))
    except OutputError:
        raise
    except Exception as error:  # one frame that trips over a fault of ours must not cost the others their report
        return pipeline.failed(task, texts.state("unexpected", kind=type(error).__name__, error=error))
    return report


def _resolved(survey: Survey) -> list[FrameTask]:
    """Tasks with the reflected temperatures that other frames measure for them put into their scenes."""
    by_id = {task.id: task for task in survey.tasks}
    measured: dict[str, Quantity] = {}
    for source in {task.reflected_from for task in survey.tasks if task.reflected_from}:
        task = by_id[source]
        try:
            measured[source] = pipeline.reflected_by_reflector(read(Path(task.path), task.read), task)
        except FrameError:
            continue  # the frames it serves say that no reflector was read

    def served(task: FrameTask) -> FrameTask:
        quantity = measured.get(task.reflected_from or "")
        task = replace(task, scene=task.scene.with_(quantity)) if quantity else task
        return replace(task, pair=replace(task.pair, partner=served(task.pair.partner))) if task.pair else task

    return [served(task) for task in survey.tasks]


def _with_window(task: FrameTask) -> FrameTask:
    """The task with the transmittance of its window as two frames of a reference measure it.  Raises FrameError."""
    frames = task.window_frames
    assert frames is not None
    without, through = (read(Path(one.path), one.read) for one in (frames.without, frames.through))
    return replace(task, scene=task.scene.with_(pipeline.window_by_frames(task, without, through)))


def own_criteria(survey: Survey) -> tuple[tuple[str, str], ...]:
    """The criteria files of a survey's own, as (name, text)."""
    return tuple(dict.fromkeys(own for task in survey.tasks for own in task.own_criteria))


def _with_trends(survey: Survey, frames: Iterable[FrameReport]) -> Iterator[FrameReport]:
    """Frames whose components are held against their own past."""
    taken = {task.id: task.taken for task in survey.tasks}
    for frame in frames:
        held = (
            replace(component, trend=trend_of(component, frame, survey.history, taken[frame.id]))
            for component in frame.components
        )
        yield replace(frame, components=tuple(held)) if survey.history else frame


def _judge_pixels(tasks: Iterable[FrameTask]) -> tuple[list[Fault], tuple[tuple[str, str], ...]]:
    """Faults that only the pixels show (a polygon outside its frame), and frames that cannot be read."""
    faults: list[Fault] = []
    unreadable = []
    for task in tasks:
        try:
            shape = read(Path(task.path), task.read).stored.shape
        except FrameError as error:
            unreadable.append((task.id, str(error)))
            continue
        outside = polygon_faults(task, (shape[0], shape[1]))
        faults += outside
        for where, area in () if outside else areas(task):
            if not mask(area, (shape[0], shape[1])).any():
                expected, remedy = "an outline around at least one pixel centre", "pixel centres are whole numbers"
                faults.append(Fault(f"frame[{task.id}].{where}", expected, "none in it", remedy))
    return faults, tuple(unreadable)


def _claim_folder(out: Path, ids: set[str]) -> None:
    """Take an empty or own folder as output; frames of an earlier run that are no longer in the survey go."""
    if out.exists() and not out.is_dir():
        raise OutputError(Fault(out.name, "a folder to write to", "a file", "choose another -o"))
    if out.is_dir() and any(out.iterdir()) and not (out / OUTPUT_MARKER).exists():
        fault = Fault(out.name, "an empty folder, or one this program wrote", "a folder with other files in it")
        raise OutputError(replace(fault, remedy="choose another -o"))
    for folder in (out / "frames", *(out / "frames").glob("*")):
        if folder.is_symlink():  # whoever set it: what lies behind it is not ours to write over or to clear away
            where = folder.relative_to(out.parent).as_posix()
            raise OutputError(Fault(where, "a folder of this report", "a link", "remove it, or choose another -o"))
    write_text(out / OUTPUT_MARKER, _MARKER_TEXT)
    for part in (*out.glob(f"{PART}*"), *out.glob(f"frames/*/{PART}*")):
        part.unlink(missing_ok=True)  # of a run that was killed while it wrote
    for folder in (out / "frames").glob("*"):
        if folder.name not in ids:
            for name in (*frame_files.NAMES, kept.PHOTOGRAPH):
                (folder / name).unlink(missing_ok=True)
            if not any(folder.iterdir()):
                folder.rmdir()


def _concluded(survey: Survey, frames: tuple[FrameReport, ...]) -> Report:
    """The statements about the survey as a whole."""
    known = criteria(own_criteria(survey))
    frames = tuple(_with_trends(survey, frames))
    assets = tuple(_assets(survey, frames))
    analysed = [frame for frame in frames if frame.status == "analysed"]
    level, reason = overall((frame.id, frame.claim, frame.claim_reason) for frame in analysed)
    seasons = seasons_of(survey.seasons, frames, survey.elements)
    is_building = any(task.kind == "building" for task in survey.tasks)
    return Report(
        format=1,
        tool={"name": "irsurvey", "version": __version__},
        survey=json.loads(survey.as_read),
        claim=level,
        claim_reason=reason,
        conditions_review=reviewed(survey.tasks),
        next_visit=next_measurements(frames, known),
        assets=assets,
        frames=frames,
        repairs=repair_list(frames, assets, known),
        populations=populations(frames),
        seasons=seasons,
        checklist=checklist(present_in(survey, frames)) if is_building else (),
        cautions=texts.cautions_for(frames, has_season=bool(seasons)),
    )


def _assets(survey: Survey, frames: tuple[FrameReport, ...]) -> Iterator[AssetReport]:
    """Every asset of the round, inspected where an analysed frame shows it."""
    for asset in survey.assets:
        shown = tuple(frame.id for frame in frames if frame.asset == asset.id and frame.status == "analysed")
        reason = asset.not_inspected or (None if shown else texts.state("no_frame_shows_it"))
        yield AssetReport(asset.id, asset.description, asset.location, asset.criticality, reason is None, reason, shown)
