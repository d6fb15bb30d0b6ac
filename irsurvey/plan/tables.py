"""A plan as tables for people: differences as ± U (k = 2), smallest sizes and differences rounded up."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from math import floor

from irsurvey.assess.severity import LEAST_EMISSIVITY
from irsurvey.plan import ASSUMED, Difference, Gain, Prospect
from irsurvey.report import numbers, texts

_TOLD_SHARE = 0.05
"""Of the variance: causes below it are not worth a line."""
_NAMED = 3
"""Frames or parts named in a line before the rest is counted."""

Rows = Iterable[tuple[str, ...]]


@dataclass(frozen=True, slots=True)
class Table:
    """One table: what it tells, its columns, its rows."""

    title: str
    columns: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]


def tables(prospects: Sequence[Prospect], size: float) -> tuple[Table, ...]:
    """All that has rows; `size` [m] is that of the part asked about."""
    part = f"{1e3 * size:g} mm part up to"
    every = (
        ("Temperature differences", ("frames", "camera", "seen", "ε", "distance", "against", "place", "ΔT",
         "claimed from", "told from 0 from"), _differences(prospects)),
        ("Sizes", ("frames", "camera", "distance", "pixel", "spot, smallest part read", "smallest region",
         part), _sizes(prospects, )),
        ("U-values, relative U (k = 2)", ("frames", "camera", "air", "U", "alone", "with a panel of known temperature"),
         _walls(prospects)),
        ("What to improve first", ("frames", "seen", "number", "± now", "input", "share", "± once halved", "how"),
         _gains(prospects)),
    )  # fmt: skip
    made = (Table(title, columns, tuple(dict.fromkeys(rows))) for title, columns, rows in every)
    return tuple(table for table in made if table.rows)


def remarks(prospects: Iterable[Prospect]) -> Iterator[str]:
    """What the tables rest on, and what they cannot promise."""
    prospects = tuple(prospects)
    shiny = [name for one in prospects if one.emissivity < LEAST_EMISSIVITY for name in one.seen or ("the target",)]
    if shiny:
        yield f"too reflective for a claim, tape or paint first: {_named(shiny)}"
    if any(one.sizes is None for one in prospects):
        yield "no sizes without the camera's ifov_mrad"
    stated = {key: entry for one in prospects for key, entry in one.assumed.items()}
    yield "not stated in the survey file, assumed: " + ", ".join(
        f"{texts.name(key)} {numbers.with_unit(numbers.stated(entry), key)}" for key, entry in stated.items()
    )
    yield from (f"assumed: {sentence}" for sentence in ASSUMED)


def _differences(prospects: Iterable[Prospect]) -> Rows:
    for one in prospects:
        for difference in one.differences:
            yield (
                _frames(one),
                one.camera,
                _seen(one),
                f"{one.emissivity:g}",
                f"{one.distance:g} m",
                "the air" if difference.is_over_ambient else f"a {one.against}",
                difference.place,
                _kelvin(_plus_minus(one.contrast, difference.u)),
                _kelvin(numbers.rounded_up(difference.claimed)),
                _kelvin(numbers.rounded_up(difference.told_apart)),
            )
