"""Local times to instants, honestly across a clock change."""

from __future__ import annotations

from datetime import UTC, datetime, tzinfo
from difflib import get_close_matches
from zoneinfo import ZoneInfo, available_timezones

from irsurvey.errors import Fault, SurveyError


def zone_named(name: str | None) -> tzinfo:
    """The time zone of local times; UTC where the survey names none.  Raises SurveyError."""
    if name is None:
        return UTC
    try:
        return ZoneInfo(name)
    except (LookupError, ValueError, OSError) as error:  # unknown, not a name, or a folder of the database
        close = get_close_matches(name, sorted(available_timezones()), n=1, cutoff=0.7)
        remedy = f"did you mean {close[0]}?" if close else "a region and a city; offsets belong to the times"
        raise SurveyError(Fault("survey.timezone", "a time zone such as Europe/Vienna", repr(name), remedy)) from error


def instant(moment: datetime, zone: tzinfo, where: str) -> datetime:
    """`moment` with a time zone: its own, or `zone` where it has none.

    A local time that a clock change repeats or leaves out names no instant: SurveyError, not a guess.
    """
    if moment.tzinfo is not None:
        return moment
    first, second = (moment.replace(tzinfo=zone, fold=fold) for fold in (0, 1))
    offsets = first.utcoffset(), second.utcoffset()
    if offsets[0] == offsets[1]:
        return first
    is_repeated = first.astimezone(UTC).astimezone(zone).replace(tzinfo=None) == moment
    happens = "happens twice" if is_repeated else "does not exist"
    remedy = f"add its offset from UTC, such as {first.isoformat()}"
    got = f"{moment.isoformat()}, which {happens} in {zone}"
    raise SurveyError(Fault(where, "a local time that exists once", got, remedy))
