"""What [survey] tells a reader about the survey itself: its title and date, and what its author wrote freely."""

from __future__ import annotations

from irsurvey import texts
from irsurvey.model import Report
from irsurvey.numbers import SI, Style
from irsurvey.report.style import moment

_SETTINGS = {
    "title",
    "kind",
    "method",
    "viewed_from",
    "timezone",
    "reference",
    "camera",
    "display_units",
    "decimal_comma",
    "date_format",
    "criteria",
    "standards",
    "frame_table",
    "history",
}
"""Keys of [survey] that are settings, or stand elsewhere on the page."""


def said(report: Report) -> dict[str, str]:
    """Key of [survey] → its text, as it was written."""
    survey = report.survey.get("survey")
    return {key: text for key, text in survey.items() if isinstance(text, str)} if isinstance(survey, dict) else {}


def headed(report: Report, *, style: Style = SI) -> dict[str, str]:
    """Heading → what stands below it in the title block: the date in the style asked for, then the free texts."""
    return {
        texts.about(key): moment(text, style=style) if key == "date" else text
        for key, text in said(report).items()
        if text and key not in _SETTINGS
    }
