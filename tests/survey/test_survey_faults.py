"""Every fault of a survey file is found in one pass, at its key, with what was expected and the nearest known key."""

from __future__ import annotations

import pickle
from collections.abc import Callable
from pathlib import Path

import pytest

from irsurvey.errors import Fault, SurveyError
from irsurvey.model import Survey
from irsurvey.survey.load import Known, load

Load = Callable[..., Survey]
Faults = Callable[..., tuple[Fault, ...]]

SURFACE = '[[frame.surface]]\nname = "cover plate"\npolygon = [[0, 0], [9, 0], [9, 9]]\n'
COMPONENT = '[[frame.component]]\nname = "lug"\npolygon = [[0, 0], [9, 0], [9, 9]]\n'
WALL = '[[element]]\nid = "wall"\n'
SECOND = '[[frame]]\nid = "F02"\nfile = "f02.tif"\n'
THIRD = '[[frame]]\nid = "F03"\nfile = "f03.tif"\n'
GROUP = '[[group]]\nid = "north"\n'
PLATE = "frame[F01].surface[cover plate]"

APPENDED = {
    "emissivity above 1": (SURFACE + "emissivity = 1.2", f"{PLATE}.emissivity", "1.2"),
    "emissivity 0": (SURFACE + "emissivity = 0.0", f"{PLATE}.emissivity", "0.0"),
    "target emissivity": ("[target]\nemissivity = 1.01", "target.emissivity", "1.01"),
    "distance below 0": ("conditions = { distance_m = -1 }", "frame[F01].conditions.distance_m", "-1"),
    "humidity above 100": (
        "conditions = { relative_humidity_percent = 101 }",
        "frame[F01].conditions.relative_humidity_percent",
        "101",
    ),
    "humidity below 0": (
        "conditions = { relative_humidity_percent = -0.5 }",
        "frame[F01].conditions.relative_humidity_percent",
        "-0.5",
    ),
    "air in kelvin": ("conditions = { air_c = 294.15 }", "frame[F01].conditions.air_c", "294.15"),
    "a number in quotes": ('conditions = { air_c = "21" }', "frame[F01].conditions.air_c", '"21"'),
    "a number that is none": ("conditions = { air_c = nan }", "frame[F01].conditions.air_c", "NaN"),
    "true as a number": ("conditions = { air_c = true }", "frame[F01].conditions.air_c", "true"),
    "window passes and reflects more than all": (
        "window = { transmittance = 0.9, reflectance = 0.2 }",
        "frame[F01].window",
        "1.1",
    ),
    "window without transmittance": ("window = { reflectance = 0.2 }", "frame[F01].window.transmittance", "nothing"),
    "polygon of two points": (
        "reference = { polygon = [[1, 1], [2, 2]] }",
        "frame[F01].reference.polygon",
        "2",
    ),
    "polygon left of any frame": (
        "inspect = { polygon = [[-3, 1], [2, 2], [3, 3]] }",
        "frame[F01].inspect.polygon[#1][#1]",
        "-3",
    ),
    "surface without polygon": ('[[frame.surface]]\nname = "x"', "frame[F01].surface[x].polygon", "nothing"),
    "two frames with one id": ('[[frame]]\nid = "F01"\nfile = "b.tif"', "frame[F01].id", None),
    "two frames with one id but for capitals": ('[[frame]]\nfile = "f01.npy"', "frame[F01].id", None),
    "id with a space": ('[[frame]]\nid = "F 2"\nfile = "b.tif"', "frame[F 2].id", "'F 2'"),
    "id too long": (f'[[frame]]\nid = "{"x" * 65}"\nfile = "b.tif"', f"frame[{'x' * 65}].id", None),
    "id that is a folder": ('[[frame]]\nid = ".."\nfile = "b.tif"', "frame[..].id", "'..'"),
    "id that is this folder": ('[[frame]]\nid = "."\nfile = "b.tif"', "frame[.].id", "'.'"),
    "id of a device": ('[[frame]]\nid = "con"\nfile = "b.tif"', "frame[con].id", "'con'"),
    "id with a line end": ('[[frame]]\nid = "F2\\n"\nfile = "b.tif"', "frame[F2\n].id", None),
    "file out of the folder": ('[[frame]]\nid = "F2"\nfile = "../b.tif"', "frame[F2].file", "'../b.tif'"),
    "file out of the folder and back": (
        '[[frame]]\nid = "F2"\nfile = "../site/b.tif"',
        "frame[F2].file",
        "'../site/b.tif'",
    ),
    "file out of the folder, backslashes": ("[[frame]]\nid = 'F2'\nfile = 'a\\..\\..\\b.tif'", "frame[F2].file", None),
    "absolute file": ('[[frame]]\nid = "F2"\nfile = "/b.tif"', "frame[F2].file", "'/b.tif'"),
    "absolute file with a drive": ("[[frame]]\nid = 'F2'\nfile = 'C:\\b.tif'", "frame[F2].file", None),
    "file on a network": ("[[frame]]\nid = 'F2'\nfile = '\\\\host\\b.tif'", "frame[F2].file", None),
    "photo out of the folder": ('photo = "../b.jpg"', "frame[F01].photo", "'../b.jpg'"),
    "log out of the folder": ('conditions = { log = "../log.csv" }', "frame[F01].conditions.log", "'../log.csv'"),
    "glob out of the folder": (GROUP + 'frames = "../*.tif"', "group[north].frames", "'../*.tif'"),
    "glob that matches nothing": (GROUP + 'frames = "north/*.tif"', "group[north].frames", "'north/*.tif'"),
    "glob that is none": (GROUP + 'frames = "a/**b"', "group[north].frames", "'a/**b'"),
    "frame without file": ('[[frame]]\nid = "F2"', "frame[F2].file", "nothing"),
    "unknown group": ('group = "nroth"\n' + GROUP, "frame[F01].group", "'nroth'"),
    "unknown camera": ('camera = "camra"', "frame[F01].camera", "'camra'"),
    "unknown asset": ('asset = "W1"\n[[asset]]\nid = "W-1"', "frame[F01].asset", "'W1'"),
    "unknown material": (SURFACE + 'material = "brik"', f"{PLATE}.material", "'brik'"),
    "unknown material of the target": ('[target]\nmaterial = "brik"', "target.material", "'brik'"),
    "unknown circuit": (COMPONENT + 'circuit = "C"', "frame[F01].component[lug].circuit", "'C'"),
    "phase that its circuit lacks": (
        COMPONENT + 'circuit = "C"\nphase = "4"\n[[circuit]]\nid = "C"\nload_a = { "1" = 5 }',
        "frame[F01].component[lug].phase",
        "'4'",
    ),
    "unknown convection": ('conditions = { convection = "iso" }', "frame[F01].conditions.convection", "'iso'"),
    "unknown frame": ('conditions = { reflected_from = "F1" }', "frame[F01].conditions.reflected_from", "'F1'"),
    "frame without a reflector": (
        'conditions = { reflected_from = "F01" }',
        "frame[F01].conditions.reflected_from",
        "F01, which draws none",
    ),
    "reflected twice": (
        'conditions = { reflected_from = "F01", reflected_c = 3 }',
        "frame[F01].conditions.reflected_from",
        "both",
    ),
    "two surfaces of one name": (SURFACE + SURFACE, f"{PLATE}.name", "2 of it"),
    "two groups of one id": (GROUP + GROUP, "group[north].id", "2 of it"),
    "two assets of one id": ('[[asset]]\nid = "a"\n[[asset]]\nid = "a"', "asset[a].id", "2 of it"),
    "known temperature without one": (SURFACE + 'role = "known-temperature"', f"{PLATE}.temperature_c", "nothing"),
    "temperature without its role": (SURFACE + "temperature_c = 20", f"{PLATE}.temperature_c", "20"),
    "unknown role": (SURFACE + 'role = "ignored"', f"{PLATE}.role", '"ignored"'),
    "method of another kind": ('method = "contact"', "frame[F01].method", "contact"),
    "negative uncertainty": ("[uncertainty]\nair_k = -1", "uncertainty.air_k", "-1"),
    "negative half-width": (
        "[uncertainty]\nair_k = { half_width = -1 }",
        "uncertainty.air_k.half_width",
        "-1",
    ),
    "one uncertainty twice": (
        "[uncertainty]\ndistance_m = 1\ndistance_fraction = 0.1",
        "uncertainty.distance_fraction",
        "distance_m and distance_fraction",
    ),
    "detection limit 0": ("[detection]\nmin_delta_k = 0", "detection.min_delta_k", "0"),
    "day's extremes in the wrong order": (
        "conditions = { outdoor_24h_c = [5, 1] }",
        "frame[F01].conditions.outdoor_24h_c",
        "[5, 1]",
    ),
    "time in quotes": ('taken = "2026-01-18T07:12:00"', "frame[F01].taken", '"2026-01-18T07:12:00"'),
    "time in another age": ("taken = 0001-01-01T00:00:00", "frame[F01].taken", "1"),
    "two scales": (
        "known_length = { from = [0, 0], to = [1, 1], metres = 1 }\n"
        "known_rectangle = { corners = [[0, 0], [1, 0], [1, 1], [0, 1]], width_m = 1, height_m = 1 }",
        "frame[F01].known_rectangle",
        "both",
    ),
    "length of one point": (
        "known_length = { from = [1, 1], to = [1, 1], metres = 1 }",
        "frame[F01].known_length.to",
        "one point twice",
    ),
    "rectangle folded over": (
        "known_rectangle = { corners = [[0, 0], [9, 9], [9, 0], [0, 9]], width_m = 1, height_m = 1 }",
        "frame[F01].known_rectangle.corners",
        "corners that are not, or three in line",
    ),
    "rectangle seen from its edge": (
        "known_rectangle = { corners = [[0, 0], [3, 0], [6, 0], [9, 0]], width_m = 1, height_m = 1 }",
        "frame[F01].known_rectangle.corners",
        "corners that are not, or three in line",
    ),
    "outline that crosses itself": (
        "reference = { polygon = [[0, 0], [10, 10], [10, 0], [0, 10]] }",
        "frame[F01].reference.polygon",
        "side 1 from (0, 0) across side 3 from (10, 0)",
    ),
    "surface that crosses itself": (
        '[[frame.surface]]\nname = "x"\npolygon = [[0, 0], [8, 0], [8, 8], [4, -0.4], [0, 8]]',
        "frame[F01].surface[x].polygon",
        "side 1 from (0, 0) across side 3 from (8, 8)",
    ),
    "unknown element": ('element = "wal"\n' + WALL, "frame[F01].element", "'wal'"),
    "unknown element of a group": ('[[group]]\nid = "g"\nelement = "wal"\n' + WALL, "group[g].element", "'wal'"),
    "two elements of one id": (WALL + WALL, "element[wall].id", "2 of it"),
    "unknown building material": (
        WALL + 'layers = [{ material = "brik", thickness_m = 0.2 }]',
        "element[wall].layers[#1].material",
        "'brik'",
    ),
    "layer without thickness": (
        WALL + 'layers = [{ resistance_m2k_w = 0.1 }, { material = "brick" }]',
        "element[wall].layers[#2].thickness_m",
        "nothing",
    ),
    "layer of nothing": (
        WALL + "layers = [{ thickness_m = 0.1, conductivity_w_mk = 1, density_kg_m3 = 1 }]",
        "element[wall].layers[#1].specific_heat_j_kgk",
        "nothing",
    ),
    "air layer with a thickness": (
        WALL + "layers = [{ thickness_m = 0.1, resistance_m2k_w = 0.18 }]",
        "element[wall].layers[#1]",
        "thickness_m beside it",
    ),
    "layers and a mass": (
        WALL + 'mass = "light"\nlayers = [{ material = "brick", thickness_m = 0.2 }]',
        "element[wall].mass",
        "both",
    ),
    "a U-value in another unit": (WALL + "u_value_w_m2k = 320", "element[wall].u_value_w_m2k", "320"),
    "unknown sky model": ('conditions = { sky_model = "swimbank" }', "frame[F01].conditions.sky_model", "'swimbank'"),
    "humidity class 6": ("conditions = { humidity_class = 6 }", "frame[F01].conditions.humidity_class", "6"),
    "tilt beyond down": ("conditions = { tilt_deg = 181 }", "frame[F01].conditions.tilt_deg", "181"),
    "cloud in eighths": ("conditions = { cloud_fraction = 4 }", "frame[F01].conditions.cloud_fraction", "4"),
    "unheated in a word": (
        'conditions = { unheated_before = "yes" }',
        "frame[F01].conditions.unheated_before",
        '"yes"',
    ),
    "strip of one point": (
        '[[frame.strip]]\nname = "s"\nfrom = [1, 1]\nto = [1, 1]',
        "frame[F01].strip[s].to",
        "one point twice",
    ),
    "strip of even width": (
        '[[frame.strip]]\nname = "s"\nfrom = [1, 1]\nto = [1, 9]\nwidth_px = 4',
        "frame[F01].strip[s].width_px",
        "4",
    ),
    "strip undisturbed nowhere": (
        '[[frame.strip]]\nname = "s"\nfrom = [1, 1]\nto = [1, 9]\nundisturbed = "none"',
        "frame[F01].strip[s].undisturbed",
        '"none"',
    ),
    "two strips of one name": (
        '[[frame.strip]]\nname = "s"\nfrom = [1, 1]\nto = [1, 9]\n' * 2,
        "frame[F01].strip[s].name",
        "2 of it",
    ),
    "pair with nobody": ('pair = { with = "F1", pressure_pa = 5 }', "frame[F01].pair.with", "'F1'"),
    "pair with itself": ('pair = { with = "F01", pressure_pa = 5 }', "frame[F01].pair.with", "F01"),
    "pair without pressure": (
        f'pair = {{ with = "F02", pressure_pa = 0 }}\n{SECOND}',
        "frame[F01].pair.pressure_pa",
        "0",
    ),
    "pair whose pressure is not said": (
        f'pair = {{ with = "F02" }}\n{SECOND}',
        "frame[F01].pair.pressure_pa",
        "nothing",
    ),
    "pair of two pairs": (
        f'pair = {{ with = "F02", pressure_pa = 5 }}\n{SECOND}pair = {{ with = "F03", pressure_pa = 9 }}\n{THIRD}',
        "frame[F01].pair.with",
        "F02",
    ),
    "pair at one pressure": (
        f'pair = {{ with = "F02", pressure_pa = 5 }}\n{SECOND}conditions = {{ pressure_pa = 5 }}',
        "frame[F01].pair.with",
        "F02, at the same 5 Pa",
    ),
    "two pressures at once": (
        f'pair = {{ with = "F02", pressure_pa = 5 }}\nconditions = {{ pressure_pa = 6 }}\n{SECOND}',
        "frame[F01].pair.pressure_pa",
        "5",
    ),
    "season without degree days": ("[season]\nheating = { efficiency = 0.9 }", "season.heating", "neither"),
    "season of two origins": (
        '[season]\nheating = { degree_days_kd = 1, temperatures = "y.csv", base_c = 1 }',
        "season.heating",
        "both",
    ),
    "temperatures without a base": (
        '[season]\ncooling = { temperatures = "y.csv" }',
        "season.cooling.base_c",
        "nothing",
    ),
    "price without a currency": (
        "[season]\nheating = { degree_days_kd = 1, price_per_kwh = 0.1 }",
        "season.heating.currency",
        "nothing",
    ),
    "year out of the folder": (
        '[season]\nheating = { base_c = 15, temperatures = "../y.csv" }',
        "season.heating.temperatures",
        "'../y.csv'",
    ),
    "season in the wrong place": ("[season]\nefficiency = 0.9", "season.efficiency", "the unknown key efficiency"),
    "raw type nobody stores": ('dtype = "uint24"', "frame[F01].dtype", '"uint24"'),
}
REPLACED = {
    "no title": ('title = "T"\n', "", "survey.title", "nothing"),
    "no kind": ('kind = "building"\n', "", "survey.kind", "nothing"),
    "unknown kind": ('"building"', '"buildings"', "survey.kind", '"buildings"'),
    "unknown time zone": (
        'kind = "building"',
        'kind = "building"\ntimezone = "Europe/Wien"',
        "survey.timezone",
        "'Europe/Wien'",
    ),
    "a folder as time zone": ('kind = "building"', 'kind = "building"\ntimezone = "Europe"', "survey.timezone", None),
    "unknown standard": (
        'kind = "building"',
        'kind = "building"\nstandards = ["en13187"]',
        "survey.standards[#1]",
        None,
    ),
    "unknown criterion": ('kind = "building"', 'kind = "building"\ncriteria = ["dt"]', "survey.criteria[#1]", "'dt'"),
    "no camera": (
        '[camera]\nband_um = [7.5, 13]\nsignal = { quantity = "apparent-temperature", unit = "K" }\n',
        "",
        "camera",
        "nothing",
    ),
    "no band": ("band_um = [7.5, 13]\n", "", "camera.band_um", "nothing"),
    "band in the wrong order": ("[7.5, 13]", "[13, 7.5]", "camera.band_um", "[13, 7.5]"),
    "band in nanometres": ("[7.5, 13]", "[7.5, 13000]", "camera.band_um[#2]", "13000"),
    "range in the wrong order": ("[7.5, 13]", "[7.5, 13]\nrange_c = [150, -20]", "camera.range_c", "[150, -20]"),
    "no signal": (
        'signal = { quantity = "apparent-temperature", unit = "K" }\n',
        "",
        "camera.signal",
        "nothing",
    ),
    "no unit": (', unit = "K"', "", "camera.signal.unit", "nothing"),
    "noise that is none": ("[7.5, 13]", "[7.5, 13]\nnoise_k = 50", "camera.noise_k", "50"),
    "no quantity": ('quantity = "apparent-temperature", ', "", "camera.signal.quantity", "nothing"),
    "unknown quantity": ("apparent-temp", "apparant-temp", "camera.signal.quantity", '"apparant-temperature"'),
    "unknown unit": ('unit = "K"', 'unit = "k"', "camera.signal.unit", '"k"'),
    "object temperatures corrected with what": ("apparent-temp", "object-temp", "camera.signal.assumed", "nothing"),
    "no air": ("air_c = 20\n", "", "conditions.air_c", "nothing"),
    "no distance": ("distance_m = 2\n", "", "conditions.distance_m", "nothing"),
    "no reflected": ("reflected_c = 19\n", "", "conditions.reflected_c", "nothing"),
    "no frames": ('[[frame]]\nid = "F01"\nfile = "f01.tif"\n', "", "frame", "nothing"),
    "another format": ("[survey]", "format = 2\n[survey]", "format", "2"),
    "several cameras, none named": (
        "[camera]",
        '[cameras.b]\nband_um = [8, 14]\nsignal = { quantity = "counts", gain = 1 }\n[cameras.a]',
        "survey.camera",
        "nothing",
    ),
}
SIGNALS = {
    "neither gain nor calibration": ("", "camera.signal.gain", "neither"),
    "both gain and calibration": (
        "gain = 1, calibration = { points = [[1, 0], [2, 10], [3, 20]] }",
        "camera.signal.gain",
        "both",
    ),
    "gain 0": ("gain = 0", "camera.signal.gain", "0"),
    "two calibration points": (
        "calibration = { points = [[1, 0], [2, 10]] }",
        "camera.signal.calibration.points",
        "2",
    ),
    "calibration that turns round": (
        "calibration = { points = [[1, 0], [3, 10], [2, 20]] }",
        "camera.signal.calibration.points",
        "counts that do not",
    ),
    "calibration that stands still": (
        "calibration = { points = [[1, 0], [1, 10], [2, 20]] }",
        "camera.signal.calibration.points",
        "counts that do not",
    ),
    "one temperature twice": (
        "calibration = { points = [[1, 0], [2, 0], [3, 20]] }",
        "camera.signal.calibration.points",
        "counts that do not",
    ),
    "an empty calibration": ("calibration = {}", "camera.signal.calibration", "neither"),
    "half a closed form": (
        "calibration = { sakuma_hattori = { a_um = 8.8, c = 1 } }",
        "camera.signal.calibration.sakuma_hattori.b_um_k",
        "nothing",
    ),
}
ASSUMED = {
    "no emissivity": ("transmittance = 1", "emissivity", "nothing"),
    "no reflected": ("emissivity = 0.9, transmittance = 1", "reflected_c", "nothing"),
    "no path": ("emissivity = 1", "", "neither"),
    "two paths": ("emissivity = 1, transmittance = 1, distance_m = 0", "", "both"),
    "a path without its air": (
        "emissivity = 1, distance_m = 3, relative_humidity_percent = 50",
        "air_c",
        "nothing",
    ),
}


@pytest.mark.parametrize(("text", "where", "got"), APPENDED.values(), ids=APPENDED)
def test_a_wrong_value_is_a_fault_at_its_key(
    text: str, where: str, got: str | None, minimal: str, faults_of: Faults
) -> None:
    faults = faults_of(minimal + text + "\n")
    assert [fault.where for fault in faults] == [where]
    assert got in (None, faults[0].got)
    assert faults[0].expected


@pytest.mark.parametrize(("old", "new", "where", "got"), REPLACED.values(), ids=REPLACED)
def test_a_wrong_or_missing_key_of_the_shortest_survey_is_a_fault(
    old: str, new: str, where: str, got: str | None, minimal: str, faults_of: Faults
) -> None:
    assert old in minimal
    faults = faults_of(minimal.replace(old, new))
    assert [fault.where for fault in faults] == [where]
    assert got in (None, faults[0].got)


@pytest.mark.parametrize(("text", "where", "got"), SIGNALS.values(), ids=SIGNALS)
def test_counts_need_one_way_to_radiance(text: str, where: str, got: str, minimal: str, faults_of: Faults) -> None:
    signal = 'quantity = "counts"' + (f", {text}" if text else "")
    fault = faults_of(minimal.replace('quantity = "apparent-temperature", unit = "K"', signal))
    assert [(f.where, f.got) for f in fault] == [(where, got)]


@pytest.mark.parametrize(("text", "key", "got"), ASSUMED.values(), ids=ASSUMED)
def test_object_temperatures_need_all_they_were_corrected_with(
    text: str, key: str, got: str, minimal: str, faults_of: Faults
) -> None:
    signal = f'quantity = "object-temperature", unit = "C", assumed = {{ {text} }}'
    faults = faults_of(minimal.replace('quantity = "apparent-temperature", unit = "K"', signal))
    assert [(f.where, f.got) for f in faults] == [(f"camera.signal.assumed{key and '.' + key}", got)]


@pytest.mark.parametrize(
    ("text", "where", "known"),
    [
        ("conditions = { air_k = 3 }", "frame[F01].conditions.air_k", "air_c"),
        (
            "conditions = { rel_humidity_percent = 3 }",
            "frame[F01].conditions.rel_humidity_percent",
            "relative_humidity_percent",
        ),
        ("window = { transmittance = 0.9, reflectence = 0 }", "frame[F01].window.reflectence", "reflectance"),
        (SURFACE + "emisivity = 0.9", f"{PLATE}.emisivity", "emissivity"),
        (
            "known_length = { from = [0, 0], two = [1, 1], to = [1, 1], metres = 1 }",
            "frame[F01].known_length.two",
            "to",
        ),
        ("[uncertainty]\nemissivty = 0.1", "uncertainty.emissivty", "emissivity"),
        ('[[group]]\nid = "g"\nframe = "*"', "group[g].frame", "frames"),
        ("[condition]\nair_c = 1", "condition", "conditions"),
        ("[uncertainty]\nair_k = { halfwidth = 1, half_width = 1 }", "uncertainty.air_k.halfwidth", "half_width"),
    ],
)
def test_an_unknown_key_names_the_nearest_known_one(
    text: str, where: str, known: str, minimal: str, faults_of: Faults
) -> None:
    fault = faults_of(minimal + text + "\n")[0]
    assert fault.where == where
    assert fault.got == f"the unknown key {where.split('.')[-1]}"
    assert fault.remedy == f"did you mean {known}?"


@pytest.mark.parametrize(
    ("text", "where", "home"),
    [
        ("emissivity = 0.9", "frame[F01].emissivity", "target"),
        ("reflected_c = 3", "frame[F01].reflected_c", "conditions"),
        ("min_pixels = 3", "frame[F01].min_pixels", "detection"),
        ("metres = 3", "frame[F01].metres", "known_length"),
        ("tilt_deg = 3", "frame[F01].tilt_deg", "conditions"),
        ("pressure_pa = 3", "frame[F01].pressure_pa", "conditions"),
        ("[season]\nefficiency = 0.9", "season.efficiency", "heating"),
        ("window = { transmittance = 0.9, air_c = 2 }", "frame[F01].window.air_c", "conditions"),
        ('[[group]]\nid = "g"\ndistance_m = 8', "group[g].distance_m", "conditions"),
    ],
)
def test_a_key_at_the_wrong_place_is_told_where_it_belongs(
    text: str, where: str, home: str, minimal: str, faults_of: Faults
) -> None:
    fault = faults_of(minimal + text + "\n")[0]
    assert fault.where == where
    assert fault.remedy == f"it belongs under {home}"


@pytest.mark.parametrize(
    ("text", "nearest"),
    [
        ('group = "nroth"\n' + GROUP, "north"),
        (SURFACE + 'material = "bricks"', "brick"),
        ('conditions = { convection = "iso6946" }', "iso-6946"),
        ('viewed_from = "outsde"', "outside"),
        ('conditions = { reflected_from = "F1" }', "F01"),
        ('conditions = { sky_model = "swimbank" }', "swinbank"),
        ('element = "wal"\n' + WALL, "wall"),
        (WALL + 'layers = [{ material = "brik", thickness_m = 0.2 }]', "brick"),
        ('pair = { with = "F1", pressure_pa = 5 }', "F01"),
    ],
)
def test_an_unknown_name_names_the_nearest_known_one(text: str, nearest: str, minimal: str, faults_of: Faults) -> None:
    assert faults_of(minimal + text + "\n")[0].remedy == f"did you mean {nearest}?"


def test_all_faults_of_all_kinds_are_found_in_one_pass(minimal: str, faults_of: Faults) -> None:
    """Types, limits, unknown keys, references, paths, ids, a table and a log, in one file."""
    text = (
        'frame_table = "frames.csv"\n'
        + minimal.replace("[7.5, 13]", "[13, 7.5]\nserail = 1")
        .replace('kind = "building"', 'kind = "building"\ntimezone = "Europe/Wien"\ncriteria = ["dt"]')
        .replace("air_c = 20", 'air_c = "warm"\nlog = "log.csv"')
        + 'group = "nroth"\n'
        + SURFACE
        + 'emissivity = 1.2\nmaterial = "brik"\n'
        + '[[frame]]\nid = "f01"\nfile = "../b.tif"\n'
        + '[[frame]]\nfile = "F01.npy"\nwindow = { transmittance = 0.9, reflectance = 0.2, ambient = 3 }\n'
        + GROUP
        + 'frames = "none/*"\n'
    )
    files = {"frames.csv": "file,distnace\na.tif,3\n", "log.csv": "time,air_c\nnoon,3\n"}
    found = {fault.where for fault in faults_of(text, files)}
    assert found == {
        "camera.band_um",
        "camera.serail",
        "conditions.air_c",
        "conditions.log[log.csv], line 2",
        "frame[F01].group",
        "frame[F01].id",
        "frame[F01].surface[cover plate].emissivity",
        "frame[F01].surface[cover plate].material",
        "frame[F01].window",
        "frame[F01].window.ambient",
        "frame[f01].file",
        "frame_table[frames.csv].distnace",
        "group[north].frames",
        "survey.criteria[#1]",
        "survey.timezone",
    }


def test_a_fault_causes_no_second_one(minimal: str, faults_of: Faults) -> None:
    """A camera without band is not also a missing camera, nor a group with a wrong key an unknown group."""
    text = (
        minimal.replace("band_um = [7.5, 13]\n", "")
        + 'group = "north"\ncamera = "camera"\n[[group]]\nid = "north"\nframes = 3\n'
    )
    assert {fault.where for fault in faults_of(text)} == {"camera.band_um", "group[north].frames"}


def test_a_fault_of_an_element_is_not_also_an_unknown_element(minimal: str, faults_of: Faults) -> None:
    text = minimal + 'element = "wall"\n[[element]]\nid = "wall"\nmass = "massive"\n'
    assert [fault.where for fault in faults_of(text)] == ["element[wall].mass"]
    strip = minimal + '[[frame.strip]]\nname = "s"\nfrom = [1, 1]\n'
    assert [fault.where for fault in faults_of(strip)] == ["frame[F01].strip[s].to"]


def test_an_outline_that_only_touches_itself_or_goes_round_either_way_is_sound(minimal: str, load_text: Load) -> None:
    for corners in (
        "[[0, 0], [9, 0], [9, 9], [0, 9]]",
        "[[0, 9], [9, 9], [9, 0], [0, 0]]",
        "[[0, 0], [9, 0], [9, 9], [0, 9], [0, 0]]",  # closed by its first corner
        "[[0, 0], [9, 0], [9, 9], [5, 0], [0, 9]]",  # a corner on another side
        "[[0, 0], [9, 0], [9, 9], [5, 5], [1, 9]]",  # a corner that points inward
    ):
        assert load_text(f"{minimal}inspect = {{ polygon = {corners} }}\n").tasks[0].inspect is not None


def test_only_an_outline_of_up_to_500_corners_is_searched_for_crossings(
    minimal: str, load_text: Load, faults_of: Faults
) -> None:
    crossed = [[0, 0], [10, 10], [10, 0]]
    around = [[0, 10 + step / 100] for step in range(498)]
    text = f"{minimal}inspect = "
    faults = faults_of(f"{text}{{ polygon = {crossed + around[1:]} }}\n")
    assert [fault.where for fault in faults] == ["frame[F01].inspect.polygon"]
    assert len(load_text(f"{text}{{ polygon = {crossed + around} }}\n").tasks[0].inspect or ()) == 501


def test_an_unknown_key_hides_no_other_fault(minimal: str, faults_of: Faults) -> None:
    signal = 'quantity = "counts", gain = 1, calibration = { points = [[1, 0], [2, 10], [3, 20]], spline = 3 }'
    faults = faults_of(minimal.replace('quantity = "apparent-temperature", unit = "K"', signal))
    assert {fault.where for fault in faults} == {"camera.signal.calibration.spline", "camera.signal.gain"}


@pytest.mark.parametrize(
    ("text", "line"),
    [
        ('[survey]\ntitle = "T"\nkind = building\n', "line 3"),
        ('[survey]\ntitle = "T"\ntitle = "U"\n', "line 3"),
        ("[survey\n", "line 1"),
        ('[survey]\r\ntitle = "T"\r\nkind = \r\n', "line 3"),
        ('[survey]\ntitle = """\n', "line 3"),
        ("a = " + "9" * 5000, "line 1"),
    ],
)
def test_broken_toml_is_a_fault_with_its_line(text: str, line: str, faults_of: Faults) -> None:
    (fault,) = faults_of(text)
    assert fault.where == f"survey.toml, {line}"


@pytest.mark.parametrize("text", ["a = " + "[" * 3000, ".".join("a" * 3000) + " = 1"])
def test_tables_nested_without_end_are_a_fault(text: str, faults_of: Faults) -> None:
    (fault,) = faults_of(text)
    assert fault.where == "survey.toml"


def test_another_encoding_is_a_fault_with_its_line(folder: Path) -> None:
    (folder / "survey.toml").write_bytes('[survey]\ntitle = "Wände"\n'.encode("latin-1"))
    with pytest.raises(SurveyError) as caught:
        load(folder / "survey.toml", known=Known((), (), {}))
    assert caught.value.faults[0].where == "survey.toml, line 2"


def test_a_byte_order_mark_is_no_fault(minimal: str, load_text: Load) -> None:
    assert load_text("\ufeff" + minimal).title == "T"


@pytest.mark.parametrize("name", ["absent.toml", "."])
def test_a_survey_file_that_cannot_be_read_is_a_fault(name: str, folder: Path) -> None:
    with pytest.raises(SurveyError) as caught:
        load(folder / name, known=Known((), (), {}))
    assert caught.value.faults[0].expected == "a survey file"


def test_a_missing_frame_file_is_no_fault(minimal: str, load_text: Load) -> None:
    survey = load_text(minimal)
    assert survey.tasks[0].path == str(Path(survey.folder) / "f01.tif")
    assert any("raw file missing" in notice for notice in survey.notices)


def test_faults_survive_pickling_and_read_as_lines(minimal: str, folder: Path) -> None:
    (folder / "survey.toml").write_text(minimal + "emissivity = 2\nspot = 3\n")
    with pytest.raises(SurveyError) as caught:
        load(folder / "survey.toml", known=Known((), (), {}))
    again = pickle.loads(pickle.dumps(caught.value))
    assert again.faults == caught.value.faults
    assert len(str(again).splitlines()) == 2
