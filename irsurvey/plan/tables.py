"""A plan as tables for people: uncertainties as ± U (k = 2); what is claimed or resolved is never flattered."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from math import floor

from irsurvey import numbers, texts
from irsurvey.assess.severity import LEAST_EMISSIVITY
from irsurvey.model import Estimate
from irsurvey.plan import ASSUMED, OVER_AMBIENT, Gain, Prospect

_TOLD_SHARE = 0.1
"""Of the variance: what takes less gains next to nothing."""
_NAMED = 3
"""Frames or parts that are named before the rest is counted."""

Rows = Iterator[tuple[str, ...]]


@dataclass(frozen=True, slots=True)
class Table:
    """What it tells, its columns, its rows."""

    title: str
    columns: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]


def tables(prospects: Sequence[Prospect], size: float) -> tuple[Table, ...]:
    """All tables that have rows; `size` [m] is that of the part asked about."""
    numbered = {str(number): prospect for number, prospect in enumerate(prospects, 1)}
    farthest = f"a part of {1e3 * size:g} mm up to"
    every = (
        ("What is to be seen", ("no.", "frames", "camera", "seen", "ε", "distance"), _kinds(numbered)),
        (
            "Temperature differences",
            ("no.", "where", "against", "ΔT ± U", "claimed from", "differs from 0 from"),
            _together(_differences(numbered)),
        ),
        (
            "Sizes",
            ("no.", "pixel", "spot: smallest part to be read", "smallest region that counts", farthest),
            _together(_sizes(numbered)),
        ),
        (
            "U-values: relative uncertainty (k = 2)",
            ("no.", "U", "air in and out", "alone", "with a surface of known temperature"),
            _together(_walls(numbered)),
        ),
        (
            "What to improve first",
            ("no.", "number", "± U", "because of", "share", "± U, that halved"),
            _together(_improvements(numbered)),
        ),
        ("How", ("because of", "do"), _advice(prospects)),
    )
    made = (Table(title, columns, tuple(dict.fromkeys(rows))) for title, columns, rows in every)
    return tuple(table for table in made if table.rows)


def remarks(prospects: Sequence[Prospect]) -> Iterator[str]:
    """How the tables are to be read, what they cannot promise, and what they rest on."""
    yield "claimed: what is read as that truly exceeds the smallest difference that counts, with 95 % probability"
    yield "differs from 0: the 95 % interval of what is read as that leaves out 0"
    shiny = [name for one in prospects if one.emissivity < LEAST_EMISSIVITY for name in one.seen or ("the target",)]
    if shiny:
        yield f"too reflective for a claim, tape or paint it first: {', '.join(dict.fromkeys(shiny))}"
    blind = dict.fromkeys(one.camera for one in prospects if one.sizes is None)
    if blind:
        yield f"no sizes, as ifov_mrad is not stated: {', '.join(blind)}"
    assumed: dict[str, dict[str, None]] = {}
    for one in prospects:
        for key, entry in one.assumed.items():
            assumed.setdefault(texts.name(key), {})[numbers.with_unit(numbers.stated(entry), key)] = None
    if assumed:
        listed = "; ".join(f"{name} {' or '.join(values)}" for name, values in assumed.items())
        yield f"assumed, as the survey does not state it (k = 2): {listed}"
    yield from (f"assumed: {sentence}" for sentence in ASSUMED)


def _kinds(numbered: Mapping[str, Prospect]) -> Rows:
    for number, one in numbered.items():
        frames = f"{one.group}: {_named(one.frames)}" if one.group else _named(one.frames)
        seen = (_named(one.seen) if one.seen else "target") + (", through a window" if one.through_window else "")
        yield number, frames, one.camera, seen, f"{one.emissivity:g}", f"{one.distance:g} m"


def _differences(numbered: Mapping[str, Prospect]) -> Rows:
    for number, one in numbered.items():
        for difference in one.differences:
            yield (
                number,
                difference.place,
                "" if difference.place == OVER_AMBIENT else f"a {one.against}",
                numbers.with_unit(numbers.shown(Estimate(one.contrast, difference.u)), "_k"),
                numbers.with_unit(numbers.rounded_up(difference.claimed), "_k"),
                numbers.with_unit(numbers.rounded_up(difference.told_apart), "_k"),
            )


def _sizes(numbered: Mapping[str, Prospect]) -> Rows:
    for number, one in numbered.items():
        if one.sizes is not None:
            yield (
                number,
                f"{numbers.number(1e3 * one.sizes.pixel, 3)} mm" if one.sizes.pixel > 0 else numbers.NOTHING,
                _with_unit(numbers.rounded_up(1e3 * one.sizes.spot), "mm"),
                _with_unit(numbers.rounded_up(1e4 * one.sizes.least_area), "cm²"),
                f"{floor(100 * one.sizes.farthest + 1e-6) / 100:.2f} m",  # down to a centimetre, rounding aside
            )


def _with_unit(text: str, unit: str) -> str:
    return text if text == numbers.NOTHING else f"{text} {unit}"


def _walls(numbered: Mapping[str, Prospect]) -> Rows:
    for number, one in numbered.items():
        air = "{:.1f} and {:.1f} °C".format(*one.air_c) if one.air_c else ""
        for wall in one.walls:
            shown = numbers.with_unit(f"{wall.u_value:g}", "_w_m2k")
            yield number, shown, air, numbers.percent(wall.alone), numbers.percent(wall.with_panel)


def _improvements(numbered: Mapping[str, Prospect]) -> Rows:
    for number, one in numbered.items():
        for name, u, gains, key in _uncertain(one):
            for gain in gains:
                now, then = (numbers.with_unit(numbers.rounded_up(2 * each), key) for each in (u, gain.u_halved))
                yield number, name, now, texts.name(gain.input), numbers.percent(gain.share), then


def _uncertain(one: Prospect) -> Iterator[tuple[str, float, list[Gain], str]]:
    """Name, u and gains worth telling of each number, and the ending of a key with its unit."""
    for difference in one.differences:
        if difference.u is not None:
            gains = [gain for gain in difference.gains if gain.share >= _TOLD_SHARE]
            yield f"ΔT {difference.place}", difference.u, gains, "_k"
    for wall in one.walls:
        if wall.alone is not None:
            gains = [gain for gain in wall.gains if gain.share >= _TOLD_SHARE]
            yield f"U {wall.u_value:g}", wall.alone * wall.u_value / 2, gains, "_w_m2k"


def _advice(prospects: Iterable[Prospect]) -> Rows:
    for one in prospects:
        yield from (
            (texts.name(gain.input), gain.how) for _, _, gains, _ in _uncertain(one) for gain in gains if gain.how
        )


def _together(rows: Rows) -> Rows:
    """Rows that differ in their number only, as one."""
    same: dict[tuple[str, ...], list[str]] = {}
    for number, *rest in rows:
        same.setdefault(tuple(rest), []).append(number)
    yield from ((", ".join(listed), *rest) for rest, listed in same.items())


def _named(names: Sequence[str]) -> str:
    more = f" and {len(names) - _NAMED} more" if len(names) > _NAMED else ""
    return ", ".join(names[:_NAMED]) + more
