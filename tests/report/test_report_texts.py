"""The words of the documents: every word the records can hold has its text."""

from __future__ import annotations

import re
import tomllib
from dataclasses import fields
from fnmatch import fnmatch
from importlib.resources import files
from pathlib import Path

import pytest

import irsurvey
from irsurvey import texts
from irsurvey.analysis.inputs import shown
from irsurvey.anomalies.cues import Cues
from irsurvey.assess.conformity import FOUR_WAY, OUTCOMES
from irsurvey.assess.fragile import FRAGILE
from irsurvey.assess.severity import BLOCKERS
from irsurvey.model import ComponentReport, JointHeat, Scene
from irsurvey.report import WRITERS

ROOT = Path(irsurvey.__file__).parent
SOURCES = {
    place.relative_to(ROOT).as_posix(): place.read_text(encoding="utf-8")
    for place in sorted(ROOT.rglob("*"))
    if place.suffix in (".py", ".j2", ".js")
}
TEXTS = tomllib.loads((files("irsurvey") / "texts.toml").read_text(encoding="utf-8"))

@pytest.mark.parametrize("table", ["said", "counted", "tools", "review"])
def test_every_word_is_said_somewhere(table: str) -> None:
    text = "\n".join(SOURCES.values())
    quoted = set(re.findall(r"[\"']([a-z0-9][a-z0-9_ ]*)[\"']", text))
    made = () if table == "said" else tuple(re.findall(r"\b(?:say\(`|review\(f\")([a-z]+_)\$?\{", text))
    assert [key for key in TEXTS[table] if key not in quoted and not key.startswith(made)] == []


@pytest.mark.parametrize(
    ("table", "call", "suffixes"),
    [
        ("said", r"\b(?:say|marked|worded)\(\s*", (".py", ".j2")),
        ("counted", r"\bnoun\([^,]+,\s*", (".py", ".j2")),
        ("review", r"\breview\(\s*", (".py", ".j2")),
        ("tools", r"\bsay\(", ("live/*.js",)),
        ("review", r"\bsay\(", ("review/*.js",)),
    ],
)
def test_whatever_is_said_has_its_words(table: str, call: str, suffixes: tuple[str, ...]) -> None:
    sources = [text for name, text in SOURCES.items() if any(fnmatch(name, f"*{suffix}") for suffix in suffixes)]
    said = {key for text in sources for key in re.findall(rf"{call}[\"']([a-z0-9_ ]+)[\"']", text)}
    choices = {
        key
        for text in sources
        for pair in re.findall(rf"{call}\"([a-z0-9_]+)\" if [^\"()]+ else \"([a-z0-9_]+)\"", text)
        for key in pair
    }
    assert len(said) > 3
    assert sorted((said | choices) - set(TEXTS[table])) == []


def test_every_gap_of_a_sentence_is_filled() -> None:
    # a key with gaps is never said without values
    with_gaps = {key for key, words in TEXTS["said"].items() if "{" in words}
    sources = [text for name, text in SOURCES.items() if not name.endswith(".js")]
    bare = {key for text in sources for key in re.findall(r"\b(?:say|marked|worded)\(\"([a-z0-9_]+)\"\)", text)}
    assert bare & with_gaps == set()


def test_every_flag_has_a_name_and_a_meaning() -> None:
    assert set(TEXTS["flagged"]) == set(TEXTS["flags"])
    assert texts.flag_name("saturated: 40 pixels") == "saturated: 40 pixels"


# the words of irsurvey.model: Quantity.source, FrameReport.claim, Finding.sense; urgencies of the specification
ORIGINS = ["survey", "group", "frame", "surface", "default", "material table", "measured in frame", "log"]


@pytest.mark.parametrize("source", ORIGINS)
def test_every_origin_is_stated_measured_or_assumed(source: str) -> None:
    assert texts.founded(source) in ("stated", "measured", "assumed")
    assert texts.origin(source).startswith(texts.founded(source))


def test_what_was_not_measured_is_called_assumed() -> None:
    assumed = [source for source in ORIGINS if texts.origin(source).startswith("assumed")]
    assert assumed == ["default", "material table"]


def test_every_urgency_has_its_words_and_none_is_not_harmless() -> None:
    words = [texts.urgency(level) for level in (0, 1, 2, 3, 4, None)]
    assert len(set(words)) == 6
    assert texts.urgency(None) == "cannot be classed"


def test_outcomes_and_verdicts_have_words_of_their_own() -> None:
    assert set(TEXTS["outcome"]) == set(OUTCOMES)
    assert set(TEXTS["verdict"]) == set(FOUR_WAY)
    assert len(set(map(texts.verdict, FOUR_WAY))) == len(FOUR_WAY)


# whatever may stand in a budget: the names the docstring of a scene lists
SCENE = sorted(set(re.findall(r"`([a-z_]+)(?::<[a-z]+>)?`", Scene.__doc__ or "")))


def test_the_names_of_a_scene_are_found_in_its_description() -> None:
    assert {"emissivity", "noise", "slope_y", "camera_offset", "load_exponent"} <= set(SCENE)


@pytest.mark.parametrize("name", SCENE)
def test_every_input_of_a_budget_has_plain_words(name: str) -> None:
    words = texts.name(shown(name)[0])
    assert words in TEXTS["names"].values()
    assert "_" not in words


@pytest.mark.parametrize("cue", [field.name for field in fields(Cues)])
def test_every_cue_of_a_pattern_has_plain_words(cue: str) -> None:
    assert "_" not in texts.cue(cue)
    assert cue in TEXTS["cues"]


@pytest.mark.parametrize("faced", ["air", "ambient", "indoor_air", "mean_radiant", "outdoor_air", "sky", "ground"])
def test_whatever_takes_heat_has_plain_words(faced: str) -> None:
    # what `irsurvey.analysis.exchange` may name: the air on this side, all a surface faces, or sky, haze and ground
    assert texts.term(f"radiation:{faced}").startswith("to ")
    assert "by radiation" in texts.term(f"radiation:{faced}")


@pytest.mark.parametrize(
    "flag",
    ["sunlit", "sky modelled", "sky warmer than air", "humidity by class", "ends still have a gradient"],
)
def test_flags_of_an_envelope_are_explained(flag: str) -> None:
    assert texts.flag(flag) != flag


@pytest.mark.parametrize(
    "flag", ["load not steady", "windy", "load above rating", "found, not drawn", "window temperature assumed"]
)
def test_flags_of_electrical_parts_are_explained(flag: str) -> None:
    assert texts.flag(flag) != flag


@pytest.mark.parametrize("record", [ComponentReport, JointHeat])
def test_every_number_of_a_component_and_its_joint_has_a_name_of_its_own(record: type) -> None:
    keys = [field.name for field in fields(record) if str(field.type) == "Estimate | None"]
    assert len({texts.name(key) for key in keys}) == len(keys) > 5
    assert all(texts.name(key) in TEXTS["names"].values() for key in keys)


def test_bases_and_shapes_have_words() -> None:
    assert set(TEXTS["basis"]) == {"similar", "ambient", "reference", "neighbours"}
    assert set(TEXTS["form"]) == {"cylinder", "plate", "sphere", "area"}
    assert set(TEXTS["usual"]) == {"median", "mean"}


def test_numbers_that_share_their_stem_have_names_of_their_own() -> None:
    keys = ("u_value_w_m2k", "u_value_simple_w_m2k", "u_value_increase_w_m2k", "u_value_from_contrast_w_m2k")
    keys += ("excess_heat_w", "excess_heat_w_k", "temperature_factor", "temperature_factor_at_0_25")
    assert len({texts.name(key) for key in keys}) == len(keys)


@pytest.mark.parametrize("key", ["convection_factor", "size_of_source", "selection"])
def test_a_number_without_unit_says_what_it_is(key: str) -> None:
    assert re.search(r"factor of|share of", texts.name(key))


def test_cautions_about_moisture_and_money_come_where_they_are_told_of() -> None:
    for told in ("moisture", "season"):
        (caution,) = set(texts.cautions([told])) - set(texts.cautions([]))
        assert caution not in texts.cautions(["building"])


def test_claims_and_senses_have_words() -> None:
    assert (
        set(TEXTS["claim"])
        == set(TEXTS["overall"])
        == set(TEXTS["kept"])
        == {"quantitative", "qualitative", "not valid"}
    )
    assert set(TEXTS["sense"]) == {"hot", "cold"}


@pytest.mark.parametrize(
    ("key", "name"),
    [
        ("emissivity:cover plate", "Emissivity, cover plate"),
        ("reflected_c:foil", "Reflected apparent temperature, foil"),
        ("relative_humidity_percent", "Relative humidity"),
        ("distance_m", "Distance"),
        ("edge_sharpness_per_pixel", "Edge sharpness"),
        ("something_new_k", "Something new"),
        ("elongation", "Elongation"),
        ("noise_k:F01-1 spot", "Pixel noise, measurement spot of F01-1"),
        ("noise_k:phase 2 lug whole", "Pixel noise, all of phase 2 lug"),
        ("noise_k:reference", "Pixel noise, reference area"),
        ("outline_px:reference", "Place of an outline, reference area"),
        ("outline_px:left spot", "Place of an outline, left spot"),
        ("emissivity:reference", "Emissivity, reference"),
        ("noise_k:{name} spot", "Pixel noise, measurement spot of {name}"),
    ],
)
def test_a_key_is_called_by_its_name_without_unit(key: str, name: str) -> None:
    assert texts.name(key) == name


@pytest.mark.parametrize(
    ("key", "words"), [("heat_flux_w_m2", "heat flux"), ("delta_k", "ΔT"), ("u_value_w_m2k", "U-value")]
)
def test_within_a_sentence_a_name_begins_small_unless_it_is_a_symbol(key: str, words: str) -> None:
    assert texts.inside(key) == words


def test_an_unknown_flag_is_shown_as_it_is() -> None:
    assert texts.flag("nobody knows") == "nobody knows"
    assert texts.flag("nobody knows: 3 pixels") == "nobody knows: 3 pixels"


def test_a_flag_with_detail_is_explained_like_the_flag() -> None:
    assert texts.flag("saturated: 40 pixels at or beyond the range") == texts.flag("saturated") != "saturated"


def test_electrical_cautions_come_with_electrical_frames_only() -> None:
    electrical = set(texts.cautions(["electrical"])) - set(texts.cautions([]))
    assert any("arc-flash" in caution for caution in electrical)
    assert electrical.isdisjoint(texts.cautions(["building"]))
    assert len(texts.cautions(["building", "building"])) == len(texts.cautions(["building"]))


def test_no_text_hides_a_flag_that_blocks_clearing() -> None:
    # the specification: saturation, low emissivity, too small, low or unknown load, no solution clear nothing
    for code in (
        "saturated",
        "size-limited",
        "too reflective for a claim",
        "low load",
        "load unknown",
        *BLOCKERS,
        FRAGILE,
    ):
        assert code in TEXTS["flags"]


def test_the_documents_are_json_both_tables_html_and_the_mark_of_tables() -> None:
    assert list(WRITERS) == ["json", "csv", "repairs", "html", "pdf", "csv-bom"]
