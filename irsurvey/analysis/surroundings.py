"""What the surfaces of a frame face: the side they were seen from decides; a sky nobody measured is modelled."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from irsurvey.analysis.envelope import Air, Humidity
from irsurvey.analysis.exchange import Surroundings, temperature_of
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.heat.surface import outward_sign
from irsurvey.model import FrameTask, Scene
from irsurvey.texts import state

SUNLIT_IRRADIANCE = 50.0
"""Irradiance [W m⁻²] from which a face counts as sunlit: a north face under an overcast sky gets about as much
(house rule)."""
SUN_HOURS = 2.0
"""Hours without sun before a face counts as undisturbed (EN 13187 as applied, as quoted)."""
_OVERCAST = 0.9
"""Cloud fraction from which a sky is as warm as its clouds."""
MODELLED_SKY, SUNLIT, BY_CLASS, WARM_SKY = "sky modelled", "sunlit", "humidity by class", "sky warmer than air"
NO_HUMIDITY = "humidity class without a bound"
_BOUNDED_CLASSES = (1, 2, 3, 4)
"""Classes of ISO 13788 that have an upper bound; in class 5, or without outdoor humidity, the room air is unknown."""


def surroundings(task: FrameTask, scene: Scene) -> Surroundings:
    """What the surfaces of this frame exchange heat with."""
    side, other = {"inside": ("indoor_air", "outdoor_air"), "outside": ("outdoor_air", "indoor_air")}.get(
        task.viewed_from or "", ("ambient", "")
    )
    indoor, outdoor = (scene[name].value if name in scene else np.nan for name in ("indoor_air", "outdoor_air"))
    viewed_from = task.viewed_from if task.kind == "building" else None
    air = side if side in scene else "air"
    whole = "mean_radiant" if "mean_radiant" in scene else air
    radiant = ("sky", air, "ground") if _faces_sky(scene, task) else (whole,)
    return Surroundings(
        air,
        radiant,
        float(outward_sign(viewed_from, indoor, outdoor)),
        task.convection,
        task.surface_height,
        viewed_from,
        other if viewed_from and other in scene else None,
        task.sky_model if "sky" not in scene else None,
    )


def air_of(task: FrameTask, scene: Scene) -> Air | None:
    """The air on both sides of an envelope, where both are recorded."""
    if task.kind != "building" or not all(_is_stated(scene, name) for name in ("indoor_air", "outdoor_air")):
        return None
    return Air("indoor_air", "outdoor_air")


def humidity_of(task: FrameTask, scene: Scene) -> Humidity | None:
    """Where the humidity of the room air comes from: measured, or by class; None seen from outside, or unknown."""
    if task.kind != "building" or task.viewed_from != "inside" or "indoor_air" not in scene:
        return None
    if _is_stated(scene, "indoor_humidity"):
        return Humidity("indoor_air", "indoor_humidity")
    if task.humidity_class in _BOUNDED_CLASSES and "outdoor_humidity" in scene and "outdoor_air" in scene:
        return Humidity("indoor_air", "outdoor_humidity", "outdoor_air", task.humidity_class)
    return Humidity("indoor_air", "relative_humidity") if _is_stated(scene, "relative_humidity") else None


def surroundings_flags(task: FrameTask, scene: Scene) -> Iterator[str]:
    """What a reader must know about what the surfaces of a frame faced."""
    if task.kind != "building":
        return
    if is_sunlit(scene):
        yield SUNLIT
    if _faces_sky(scene, task):
        if "sky" not in scene:
            values = {name: np.float64(value) for name, value in scene.values().items()}
            sky = temperature_of("sky", surroundings(task, scene), values) - ZERO_CELSIUS
            yield f"{MODELLED_SKY}: {state('flag_sky', sky=f'{float(sky):.0f}', model=task.sky_model)}"
        elif scene["sky"].value > scene[surroundings(task, scene).air].value:
            yield WARM_SKY
    humidity = humidity_of(task, scene)
    if humidity and humidity.humidity_class:
        yield BY_CLASS
    elif humidity is None and task.humidity_class is not None and task.viewed_from == "inside":
        yield NO_HUMIDITY


def is_sunlit(scene: Scene) -> bool:
    """Whether the sun shines on a face, or did so lately."""
    since, irradiance = scene.value("hours_since_sun"), scene.value("irradiance")
    is_lit = irradiance is not None and irradiance > SUNLIT_IRRADIANCE
    return is_lit or (since is not None and since < SUN_HOURS * 3600)


def sky_is_known(task: FrameTask, scene: Scene) -> bool:
    """Whether what a face outdoors loses heat to was measured, and the wind with it."""
    if task.viewed_from != "outside":
        return True
    measured = _is_stated(scene, "mean_radiant") or _is_stated(scene, "sky")
    return measured and _is_stated(scene, "wind")


def is_overcast(scene: Scene) -> bool:
    """Whether the sky was recorded as covered."""
    return (scene.value("cloud") or 0.0) >= _OVERCAST


def _faces_sky(scene: Scene, task: FrameTask) -> bool:
    """Whether a face looks at sky and ground by their shares: outdoors, unless stated as a whole."""
    known = "ground" in scene and ("sky" in scene or "sky_model" in scene)
    outdoors = task.kind == "building" and task.viewed_from == "outside"
    return outdoors and known and not _is_stated(scene, "mean_radiant")


def _is_stated(scene: Scene, name: str) -> bool:
    return name in scene and scene[name].source != "default"
