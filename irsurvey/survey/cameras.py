"""Cameras of the survey file in SI units."""

from __future__ import annotations

from irsurvey.model import Camera, ClosedForm, InCameraCorrection, Signal
from irsurvey.survey import schema_camera as schema
from irsurvey.survey.schema import Document
from irsurvey.survey.units import TEMPERATURE_UNITS, si


def cameras(document: Document) -> dict[str, Camera]:
    """Cameras by name; the one under [camera] is named "camera"."""
    single = {} if document.camera is None else {"camera": document.camera}
    return {name: _camera(name, stated) for name, stated in {**single, **document.cameras}.items()}


def _camera(name: str, stated: schema.Camera) -> Camera:
    low, high = stated.band_um
    limits = stated.range_c
    return Camera(
        name=name,
        band=(si("band_um", low), si("band_um", high)),
        signal=_signal(stated.signal),
        ifov=None if stated.ifov_mrad is None else si("ifov_mrad", stated.ifov_mrad),
        spot_pixels=stated.spot_pixels,
        noise=stated.noise_k,
        accuracy=stated.accuracy_k,
        accuracy_fraction=stated.accuracy_fraction,
        range=None if limits is None else (si("range_c", limits[0]), si("range_c", limits[1])),
        serial=stated.serial,
        lens=stated.lens,
        calibrated_on=stated.calibrated_on,
    )


def _signal(stated: schema.ApparentTemperature | schema.ObjectTemperature | schema.Counts) -> Signal:
    if isinstance(stated, schema.Counts):
        return _counts(stated)
    factor, shift = TEMPERATURE_UNITS[stated.unit]
    assumed = _assumed(stated.assumed) if isinstance(stated, schema.ObjectTemperature) else None
    return Signal(stated.quantity, factor * stated.scale, factor * stated.offset + shift, assumed)


def _counts(stated: schema.Counts) -> Signal:
    if stated.calibration is None:
        return Signal("counts", gain=stated.gain, bias=stated.bias)
    form = stated.calibration.sakuma_hattori
    if form is not None:
        closed = ClosedForm(si("a_um", form.a_um), si("b_um_k", form.b_um_k), form.c, form.bias)
        return Signal("counts", closed_form=closed)
    points = sorted((counts, si("blackbody_c", celsius)) for counts, celsius in stated.calibration.points or ())
    return Signal("counts", points=tuple(points))


def _assumed(stated: schema.Assumed) -> InCameraCorrection:
    values = {name: None if value is None else si(name, value) for name, value in dict(stated).items()}
    air = values["air_c"]
    return InCameraCorrection(
        emissivity=stated.emissivity,
        # idle at emissivity 1, the only case in which it may be absent: nothing is reflected
        reflected=si("reflected_c", 20.0) if values["reflected_c"] is None else values["reflected_c"],
        transmittance=values["transmittance"],
        distance=values["distance_m"],
        air=air,
        relative_humidity=values["relative_humidity_percent"],
        pressure=values["pressure_hpa"],
    )
