"""Uncertainties of a scene: their distributions, what follows what, what the camera adds, and what goes together."""

from __future__ import annotations

from collections.abc import Callable
from math import sqrt
from pathlib import Path

import numpy as np
import pytest
import tifffile

from irsurvey.analysis.inputs import inputs
from irsurvey.errors import Fault
from irsurvey.model import Quantity, Scene, Survey
from irsurvey.survey.correlations import INPUTS
from irsurvey.survey.defaults import defaults

Load = Callable[..., Survey]
Faults = Callable[..., tuple[Fault, ...]]

UNIFORM = Path(__file__).parents[1] / "real" / "uniform"
AREA = "polygon = [[0, 0], [1, 0], [1, 1]]\n"
WINDOW = "window = { transmittance = 0.8 }\n"
PLATE = f'[[frame.surface]]\nname = "plate"\nmaterial = "steel"\n{AREA}'
ULP = 1e-12
"""Relative: a half-width over √3 and a conversion of its unit are a few roundings of a double (2e-16 each)."""


def scene_of(load_text: Load, text: str) -> Scene:
    return load_text(text).tasks[0].scene


def spread(quantity: Quantity) -> tuple[float, str]:
    return quantity.u, quantity.distribution


def electrical(text: str) -> str:
    return text.replace("building", "electrical")


# --- distributions ---------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("stated", "name", "expected"),
    [
        # u of a rectangular distribution is its half-width over √3: JCGM 100:2008, 4.3.7
        ("air_k = { half_width = 0.5 }", "air", (0.5 / sqrt(3), "rectangular")),
        ("air_k = 0.5", "air", (0.5, "normal")),
        ("distance_fraction = { half_width = 0.1 }", "distance", (0.2 / sqrt(3), "rectangular")),
        ("distance_m = 0.1", "distance", (0.1, "normal")),
        ("emissivity = { half_width = 0.02 }", "emissivity", (0.02 / sqrt(3), "rectangular")),
        ("emissivity = 0.02", "emissivity", (0.02, "normal")),
        ("pressure_hpa = { half_width = 3 }", "pressure", (300 / sqrt(3), "rectangular")),
        ("window_transmittance = 0.01", "window_transmittance", (0.01, "normal")),
        ("mean_radiant_k = { half_width = 1 }", "mean_radiant", (1 / sqrt(3), "rectangular")),
        ("convection_fraction = { half_width = 0.3 }", "convection", (0.3 / sqrt(3), "rectangular")),
        ("known_temperature_k = { half_width = 1 }", "temperature:plate", (1 / sqrt(3), "rectangular")),
        ("reflected_k = { half_width = 1 }", "reflected:plate", (1 / sqrt(3), "rectangular")),
        # defaults.toml: half-widths for these, standard uncertainties for those
        ("", "air", (1 / sqrt(3), "rectangular")),
        ("", "relative_humidity", (0.3 / sqrt(3), "rectangular")),
        ("", "reflected:plate", (2 / sqrt(3), "rectangular")),
        ("", "convection", (0.25, "normal")),
        ("", "atmosphere", (0.15, "normal")),
        ("", "mean_radiant", (0.5, "normal")),
        ("", "temperature:plate", (0.3, "normal")),
    ],
)
def test_a_half_width_is_rectangular_and_a_standard_uncertainty_normal(
    stated: str, name: str, expected: tuple[float, str], minimal: str, load_text: Load
) -> None:
    surface = f'{PLATE}reflected_c = 5\nrole = "known-temperature"\ntemperature_c = 20\n'
    u, distribution = spread(scene_of(load_text, f"{minimal}{WINDOW}{surface}[uncertainty]\n{stated}\n")[name])
    assert u == pytest.approx(expected[0], rel=ULP)
    assert distribution == expected[1]


def test_every_default_is_distributed_as_its_entry_says() -> None:
    for section in ("stated", "assumed"):
        for key, default in defaults(section).items():
            assert default.distribution == ("normal" if default.half_width is None else "rectangular"), key


def test_emissivities_of_materials_spread_over_a_range_of_samples(minimal: str, load_text: Load) -> None:
    table = scene_of(load_text, minimal + PLATE)["emissivity:steel"]
    assert spread(table) == (0.1, "rectangular")  # the u that the table of materials hands over, of low…high
    stated = scene_of(load_text, f"{minimal}{PLATE}emissivity = 0.3\n[uncertainty]\nemissivity = 0.1\n")
    assert spread(stated["emissivity:steel"]) == (0.1, "normal")


def test_emissivities_of_unlike_distributions_are_two_inputs(minimal: str, load_text: Load) -> None:
    """A material (0.3 ± 0.1, from the table) and a number with the same u, stated: they do not move together."""
    number = f'[[frame.surface]]\nname = "steel"\nemissivity = 0.3\n{AREA}'
    task = load_text(f"{minimal}{PLATE}{number}[uncertainty]\nemissivity = 0.1\n").tasks[0]
    assert [surface.emissivity for surface in task.surfaces] == ["emissivity:steel", "emissivity:steel (2)"]


# --- what follows what -----------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("side", "air", "expected"),
    [
        ("inside", "", {"mean_radiant": "air"}),
        ("inside", "indoor_air_c = 22\noutdoor_air_c = 2", {"mean_radiant": "indoor_air"}),
        ("outside", "", {"mean_radiant": "air", "ground": "air"}),
        ("outside", "outdoor_air_c = 2", {"mean_radiant": "outdoor_air", "ground": "outdoor_air"}),
        ("outside", "outdoor_air_c = 2\nground_c = 2", {"mean_radiant": "outdoor_air"}),
        ("outside", "outdoor_air_c = 2\nmean_radiant_c = 2", {}),
        ("inside", "indoor_air_c = 22\nmean_radiant_c = 22", {}),
        ("electrical", "", {"ambient": "air", "mean_radiant": "ambient"}),
        ("electrical", "ambient_c = 30", {"mean_radiant": "ambient"}),
        ("electrical", "ambient_c = 20\nmean_radiant_c = 20", {}),
        ("electrical", "mean_radiant_c = 20", {"ambient": "air"}),
    ],
)
def test_what_nobody_stated_moves_with_the_air_it_is_taken_from(
    side: str, air: str, expected: dict[str, str], minimal: str, load_text: Load
) -> None:
    text = minimal.replace("air_c = 20", f"air_c = 20\n{air}")
    text = electrical(text) if side == "electrical" else text.replace("[survey]", f'[survey]\nviewed_from = "{side}"')
    scene = scene_of(load_text, text)
    follows = {q.name: q.follows for q in scene.quantities if q.follows}
    assert follows == {"total_emissivity": "emissivity", **expected}
    for name, leader in expected.items():
        assert scene[name].value == scene[leader].value
        assert scene[name].u > 0  # what it may be off on top


@pytest.mark.parametrize(
    ("stated", "expected"),
    [
        ("", {"window_temperature": "air", "window_ambient": "air"}),
        (", temperature_c = 20", {"window_ambient": "air"}),
        (", ambient_c = 20", {"window_temperature": "air"}),
        (", temperature_c = 20, ambient_c = 20", {}),
    ],
)
def test_a_window_moves_with_the_air_where_nothing_is_stated_about_it(
    stated: str, expected: dict[str, str], minimal: str, load_text: Load
) -> None:
    text = minimal.replace("air_c = 20", "air_c = 20\nmean_radiant_c = 20")
    scene = scene_of(load_text, f"{text}window = {{ transmittance = 0.8{stated} }}\n")
    follows = {q.name: q.follows for q in scene.quantities if q.follows}
    assert follows == {"total_emissivity": "emissivity", **expected}


def test_a_stated_uncertainty_of_what_follows_is_what_it_may_be_off_on_top(minimal: str, load_text: Load) -> None:
    stated = scene_of(load_text, f"{minimal}[uncertainty]\nmean_radiant_k = 0.2\n")["mean_radiant"]
    assert (stated.u, stated.follows, stated.source) == (0.2, "air", "default")


# --- what the camera adds --------------------------------------------------------------------------------------


def test_every_frame_has_the_imperfections_of_its_camera(minimal: str, load_text: Load) -> None:
    for text in (minimal, electrical(minimal)):
        scene = scene_of(load_text, text)
        assert [scene[name] for name in ("shading", "shading_x", "shading_y", "outline", "size_of_source")] == [
            Quantity("shading", 0.0, 0.5),
            Quantity("shading_x", 0.0, 0.15),
            Quantity("shading_y", 0.0, 0.15),
            Quantity("outline", 0.0, 0.5),
            Quantity("size_of_source", 0.0, 1 / sqrt(3), distribution="rectangular"),  # −1…1, JCGM 100:2008, 4.3.7
        ]


@pytest.mark.parametrize(
    ("key", "names"),
    [
        ("shading_k", ["shading"]),
        ("shading_tilt_k", ["shading_x", "shading_y"]),
        ("outline_px", ["outline"]),
        ("size_of_source_fraction", ["size_of_source"]),
    ],
)
def test_a_level_that_states_an_imperfection_is_its_source(
    key: str, names: list[str], minimal: str, load_text: Load
) -> None:
    survey = f'{minimal}group = "g"\n[uncertainty]\n{key} = 0.7\n[[group]]\nid = "g"\n'
    group = f"{survey}uncertainty = {{ {key} = {{ half_width = 0.9 }} }}\n"
    for name in names:
        assert scene_of(load_text, survey)[name] == Quantity(name, 0.0, 0.7, "survey", u_source="survey")
        assert scene_of(load_text, group)[name] == Quantity(
            name, 0.0, pytest.approx(0.9 / sqrt(3), rel=ULP), "group", distribution="rectangular", u_source="group"
        )


def test_no_notice_speaks_of_imperfections(minimal: str, load_text: Load) -> None:
    text = "\n".join(load_text(minimal).notices)
    assert not [word for word in ("shading", "outline", "size of source", "size_of_source") if word in text]


def test_the_shading_of_two_frames_of_a_uniform_target_is_what_the_defaults_quote() -> None:
    """°C = 0.025·stored − 100 (Sutherland 2025, MIT: tests/real/README.md); blocks of 50 × 50 pixels average noise."""
    corners, edges = [], []
    for path in sorted(UNIFORM.glob("*.tiff")):
        celsius = 0.025 * tifffile.imread(path) - 100
        first, middle, last = slice(0, 50), (slice(231, 281), slice(295, 345)), slice(-50, None)
        centre = celsius[middle].mean()
        corners += [centre - celsius[rows, columns].mean() for rows in (first, last) for columns in (first, last)]
        edges.append((celsius[middle[0], last].mean() - celsius[middle[0], first].mean()) / 2)
        edges.append((celsius[last, middle[1]].mean() - celsius[first, middle[1]].mean()) / 2)
    assert len(corners) == 8
    # as defaults.toml writes them, rounded to 0.1 K
    assert (round(min(corners), 1), round(max(corners), 1)) == (0.2, 0.9)
    tilt = np.sqrt(np.mean(np.square(edges)))
    assert defaults("stated")["shading_tilt_k"].u == pytest.approx(tilt, abs=0.005)  # written to 0.01 K


# --- what goes together ----------------------------------------------------------------------------------------


def correlated(*pairs: str) -> str:
    """[uncertainty] correlations of pairs such as "air_c, reflected_c, 0.8"."""
    parts = [pair.split(", ") for pair in pairs]
    tables = [f'{{ between = ["{one}", "{other}"], coefficient = {value} }}' for one, other, value in parts]
    return f"correlations = [{', '.join(tables)}]"


@pytest.mark.parametrize("key", INPUTS)
def test_inputs_that_every_frame_may_have_correlate_by_their_keys(key: str, minimal: str, load_text: Load) -> None:
    other = "reflected_c" if key != "reflected_c" else "air_c"
    scene = scene_of(load_text, f"{minimal}[uncertainty]\n{correlated(f'{key}, {other}, -0.5')}\n")
    assert scene.correlations == ((INPUTS[key], INPUTS[other], -0.5),)


def test_every_input_of_a_scene_has_a_key(minimal: str, load_text: Load) -> None:
    rich = minimal.replace(
        "air_c = 20",
        "air_c = 20\nindoor_air_c = 1\noutdoor_air_c = 1\noutdoor_24h_c = [0, 1]\nwind_m_s = 2\nambient_c = 3\n"
        "mean_radiant_c = 3\nground_c = 1\nsky_c = 1\nirradiance_w_m2 = 100\npressure_pa = 4\n"
        "hours_since_sun = 1\nhours_since_rain = 1\nview_angle_deg = 1\nhours_difference_held = 1\n"
        "hours_steady = 1\nhours_furniture_clear = 1\nindoor_relative_humidity_percent = 1\n"
        "outdoor_relative_humidity_percent = 1",
    ).replace("[camera]", "[camera]\nifov_mrad = 1")
    rich += f"{WINDOW}known_length = {{ from = [0, 0], to = [1, 1], metres = 2 }}\n"
    rich += 'element = "wall"\n[[element]]\nid = "wall"\nu_value_w_m2k = 1\n'
    rich += '[[frame]]\nid = "out"\nfile = "c.tif"\nviewed_from = "outside"\n'
    rich = rich.replace("mean_radiant_c = 3\n", "").replace("sky_c = 1\n", "")  # so that the sky is modelled
    rich += '[[frame]]\nid = "F02"\nfile = "b.tif"\nconditions = { mean_radiant_c = 3, sky_c = 1 }\n'
    rich += "known_rectangle = { corners = [[0, 0], [5, 0], [5, 5], [0, 5]], width_m = 1, height_m = 1 }\n"
    names = {q.name for task in load_text(rich).tasks for q in task.scene.quantities}
    assert names - set(INPUTS.values()) == {"outline"}  # of each area on its own
    later = {"camera_offset", "camera_gain", "load_exponent"}  # in the scene once the frame and its twins are known
    assert set(INPUTS.values()) - names == later


AS_CONDITIONS = {
    "pressure_pa",
    "cloud_fraction",
    "indoor_relative_humidity_percent",
    "outdoor_relative_humidity_percent",
}
"""What [conditions] calls otherwise than a report does; both names count."""


def test_what_conditions_call_otherwise_also_goes_by_the_report_s_name() -> None:
    for key in AS_CONDITIONS:
        assert [other for other, name in INPUTS.items() if name == INPUTS[key] and other not in AS_CONDITIONS], key


@pytest.mark.parametrize("key", sorted(INPUTS.keys() - AS_CONDITIONS))
def test_an_input_s_key_is_the_one_that_a_report_lists_it_under(key: str) -> None:
    assert list(inputs(Scene((Quantity(INPUTS[key], 0.5),)))) == [key]


@pytest.mark.parametrize(
    ("surface", "key", "name"),
    [
        (PLATE, "emissivity:plate", "emissivity:steel"),
        (PLATE, "emissivity:steel", "emissivity:steel"),  # as report.json calls it
        (f"{PLATE}emissivity = 0.4\n", "emissivity:steel", "emissivity:steel"),
        (f"{PLATE}reflected_c = 5\n", "reflected_c:plate", "reflected:plate"),
        (
            f'{PLATE}role = "known-temperature"\ntemperature_c = 20\n',
            "temperature_c:plate",
            "temperature:plate",
        ),
        (
            f'[[frame.component]]\nname = "lug"\ngroup = "lugs"\nemissivity = 0.4\n{AREA}',
            "emissivity:lug",
            "emissivity:lugs",
        ),
    ],
)
def test_inputs_of_an_area_correlate_by_the_area_s_name(
    surface: str, key: str, name: str, minimal: str, load_text: Load
) -> None:
    text = f"{minimal}{surface}[uncertainty]\n{correlated(f'{key}, emissivity, 0.9')}\n"
    assert scene_of(load_text, text).correlations == ((name, "emissivity", 0.9),)


def test_correlations_add_up_over_the_levels_and_the_lowest_counts_for_a_pair(minimal: str, load_text: Load) -> None:
    text = (
        f'{minimal}group = "g"\nuncertainty = {{ {correlated("air_c, indoor_air_c, 1")} }}\n'
        f'[[frame]]\nid = "F02"\nfile = "b.tif"\n'
        f"[uncertainty]\n{correlated('air_c, reflected_c, 0.8', 'air_c, wind_m_s, 0.1')}\n"
        f'[[group]]\nid = "g"\nuncertainty = {{ {correlated("reflected_c, air_c, 0")} }}\n'
    )
    first, second = load_text(text).tasks
    assert second.scene.correlations == (("air", "reflected", 0.8), ("air", "wind", 0.1))
    assert first.scene.correlations == (("reflected", "air", 0.0), ("air", "wind", 0.1), ("air", "indoor_air", 1.0))


def test_an_area_s_correlation_holds_where_the_area_is(minimal: str, load_text: Load) -> None:
    text = f'{minimal}{PLATE}[[frame]]\nid = "F02"\nfile = "b.tif"\n[uncertainty]\n'
    first, second = load_text(text + correlated("emissivity:plate, emissivity, 1")).tasks
    assert first.scene.correlations == (("emissivity:steel", "emissivity", 1.0),)
    assert second.scene.correlations == ()


def test_without_correlations_there_are_none_and_no_notice_counts_them_as_uncertainties(
    minimal: str, load_text: Load
) -> None:
    assert scene_of(load_text, minimal).correlations == ()
    notices = load_text(f"{minimal}[uncertainty]\nair_k = 1\n{correlated('air_c, reflected_c, 1')}\n").notices
    assert notices[-1].endswith("assumed for all inputs besides air_k")


def test_a_table_of_frames_may_state_correlations(minimal: str, load_text: Load) -> None:
    cell = '"[{ between = [""air_c"", ""reflected_c""], coefficient = 0.5 }]"'
    survey = load_text(f'frame_table = "t.csv"\n{minimal}', {"t.csv": f"file,uncertainty.correlations\na.tif,{cell}\n"})
    assert survey.tasks[1].scene.correlations == (("air", "reflected", 0.5),)


BETWEEN = "uncertainty.correlations[#1].between"


@pytest.mark.parametrize(
    ("pairs", "where", "got", "remedy"),
    [
        (["air, reflected_c, 1"], BETWEEN, "'air'", "did you mean air_c?"),
        (["reflected_c, emisivity, 1"], BETWEEN, "'emisivity'", "did you mean emissivity?"),
        (["air_c, emissivity:plat, 1"], BETWEEN, "'emissivity:plat'", "did you mean emissivity:plate?"),
        (["air_c, emissivity:sill, 1"], BETWEEN, "'emissivity:sill'", None),  # it has the target's
        (["air_c, reflected_c:plate, 1"], BETWEEN, "'reflected_c:plate'", None),  # it has the frame's
        (["air_c, outline_px, 1"], BETWEEN, "'outline_px'", None),
        (["air_c, air_c, 1"], BETWEEN, "air_c and air_c, which are one", None),
        (
            ["emissivity:plate, emissivity:steel, 1"],
            BETWEEN,
            "emissivity:plate and emissivity:steel, which are one",
            None,
        ),
        (
            ["air_c, wind_m_s, 1", "wind_m_s, air_c, 1"],
            "uncertainty.correlations[#2].between",
            "wind_m_s and air_c again",
            None,
        ),
        (
            ["air_c, emissivity:plate, 1", "air_c, reflected_c, 1", "air_c, emissivity:steel, 0"],
            "uncertainty.correlations[#3].between",
            "air_c and emissivity:steel again",
            None,
        ),
        (["air_c, reflected_c, 1.01"], "uncertainty.correlations[#1].coefficient", "1.01", None),
        (["air_c, reflected_c, -2"], "uncertainty.correlations[#1].coefficient", "-2", None),
        (["air_c, reflected_c, nan"], "uncertainty.correlations[#1].coefficient", "NaN", None),
    ],
)
def test_a_wrong_correlation_is_a_fault_at_its_key(
    pairs: list[str], where: str, got: str, remedy: str | None, minimal: str, faults_of: Faults
) -> None:
    sill = f'[[frame.surface]]\nname = "sill"\n{AREA}'
    second = '[[frame]]\nid = "F02"\nfile = "b.tif"\n'  # the fault is one, however many frames it concerns
    (fault,) = faults_of(f"{minimal}{PLATE}{sill}{second}[uncertainty]\n{correlated(*pairs)}\n")
    assert (fault.where, fault.got) == (where, got)
    assert remedy in (None, fault.remedy)


def test_a_wrong_correlation_of_a_group_or_a_frame_is_a_fault_there(minimal: str, faults_of: Faults) -> None:
    """What only another frame has is unknown to this one; a name may be right at the survey and wrong below."""
    pair = correlated("air_c, emissivity:plate, 1")
    plate = f'[[frame.surface]]\nname = "plate"\nemissivity = 0.3\n{AREA}'
    text = (
        f"{minimal}{plate}"
        f'[[frame]]\nid = "F02"\nfile = "b.tif"\ngroup = "g"\nuncertainty = {{ {pair} }}\n'
        f'[[group]]\nid = "g"\nuncertainty = {{ {pair} }}\n[uncertainty]\n{pair}\n'
    )
    assert {fault.where for fault in faults_of(text)} == {f"group[g].{BETWEEN}", f"frame[F02].{BETWEEN}"}


@pytest.mark.parametrize(
    ("wrong", "where"),
    [
        ("emissivity = 1.3\n", "frame[F01].surface[plate].emissivity"),
        ('material = "stel"\n', "frame[F01].surface[plate].material"),
    ],
)
def test_an_area_at_fault_is_not_also_an_unknown_input_but_a_misspelt_key_is(
    wrong: str, where: str, minimal: str, faults_of: Faults
) -> None:
    plate = f'[[frame.surface]]\nname = "plate"\n{AREA}{wrong}'
    pairs = correlated("air_c, emissivity:plate, 1", "ari_c, reflected_c, 1")
    faults = faults_of(f"{minimal}{plate}[uncertainty]\n{pairs}\n")
    assert {fault.where for fault in faults} == {where, "uncertainty.correlations[#2].between"}


@pytest.mark.parametrize(
    ("text", "where"),
    [
        ('correlations = [{ between = ["air_c"], coefficient = 1 }]', f"{BETWEEN}[#2]"),
        ('correlations = [{ between = ["air_c", "sky_c", "wind_m_s"], coefficient = 1 }]', BETWEEN),
        ('correlations = [{ between = ["air_c", "sky_c"] }]', "uncertainty.correlations[#1].coefficient"),
        ("correlations = [{ coefficient = 1 }]", BETWEEN),
        ('correlations = { between = ["air_c", "sky_c"], coefficient = 1 }', "uncertainty.correlations"),
        ('correlations = [{ betwen = ["air_c", "sky_c"], coefficient = 1 }]', BETWEEN),
    ],
)
def test_a_misshapen_correlation_is_a_fault_at_its_key(text: str, where: str, minimal: str, faults_of: Faults) -> None:
    assert where in {fault.where for fault in faults_of(f"{minimal}[uncertainty]\n{text}\n")}


def test_a_survey_without_frames_says_only_that(minimal: str, faults_of: Faults) -> None:
    text = minimal.split("[[frame]]")[0] + f"[uncertainty]\n{correlated('air_c, emissivity:plate, 1')}\n"
    assert [fault.where for fault in faults_of(text)] == ["frame"]
