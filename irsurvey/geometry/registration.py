"""Two frames of one view laid over each other: found shift and rotation, or a refusal that says what would help."""

from __future__ import annotations

from dataclasses import dataclass
from math import ceil, cos, degrees, hypot, pi, radians, sin, sqrt
from typing import Any

import cv2
import numpy as np
from numpy.typing import NDArray

from irsurvey.texts import state

Image = NDArray[np.float32]

RESIDUAL = 0.3
"""Misregistration [px] that an accepted pair may still have: twice the worst (0.15, one in ten above 0.03) of 700
pairs made with known transforms, which know no parallax and no lens distortion."""
LEAST_CORRELATION = 0.8
"""Of two pictures laid over each other, without what stands apart, below which they are not taken for one view: of 700
pairs of different walls none that stayed within the other limits reached 0.75, of 400 of one wall, half with a leak,
none fell below 0.99.  Where structure hardly stands above noise it falls, and some of one wall are refused."""
_LARGEST_SHIFT = 0.1
"""Of the frame's smaller side: more, and too little is seen in both."""
_LARGEST_ROTATION = 5.0
"""[°] of a camera on a tripod or held again as it was; more is another view."""
_SMOOTHING = 1.0
"""Standard deviation [px] of the blur against noise before gradients are taken."""
_COMMON = 99.9
"""Percentile of structure at which both pictures are cut to what the fainter one has: a leak shows in one only, two
marks on a bare wall cover a few thousandths of it."""
_SMALLEST = 24
"""Pixels a side needs: six times the blur that tells structure from drift."""
_REACH = 0.15
"""Shifts looked at for a start, of the frame's smaller side: beyond what is accepted, to say that it moved too far."""
_STARTS = tuple(range(-6, 7))
"""Rotations [°] looked at for a start, beyond those accepted; half a degree off moves no corner by 2 % of the frame."""
_ASTRAY = 0.05
"""Of the frame's larger side: a fit that takes a pixel further from its start, which is better than that, is lost."""
_EXTREME = 4.0
"""Standard deviations from which a difference of the two is not noise, and does not steer the fit."""
_ROUNDS = 3
"""Of telling what stands apart and fitting without it: the third moves no place by more than 0.04 px."""
_STEPS = (cv2.TERM_CRITERIA_EPS | cv2.TERM_CRITERIA_COUNT, 30, 1e-7)
"""When a fit ends: a hundred steps down to 1e-10 place no picture of the tests otherwise by more than 1e-5 px."""


@dataclass(frozen=True, slots=True, eq=False)
class Registration:
    """Where the pixels of one frame, the fixed one, lie in another.

    `matrix` (2, 3) maps (x, y, 1) of the fixed frame to (x, y) of the moving one; `correlation` −1…1 of the two
    pictures laid over each other, without their large-scale differences and what stands apart; `shift_px` (x, y) of
    the frame's centre; `rotation_deg` clockwise as seen.  Not `accepted`: `reason` says why and what would help; the
    numbers, NaN where there are none, are then no more than what was tried.
    """

    matrix: NDArray[np.float64]
    correlation: float
    shift_px: tuple[float, float]
    rotation_deg: float
    accepted: bool
    reason: str = ""


def register(moving: NDArray[Any], fixed: NDArray[Any]) -> Registration:
    """Shift and rotation between two frames (rows, columns) of one view in any unit; NaN where there are no data.

    Cross-correlation at whole pixels and degrees for a start (phase correlation, which whitens, loses long smooth
    lines that turned), refined by maximising the enhanced correlation coefficient
    (Evangelidis and Psarakis 2008, doi 10.1109/TPAMI.2008.113), which no gain and offset between the two changes.
    What stands out in one of them alone is masked and the fit repeated.  Refused where the two do not correlate, where
    their common structure against noise leaves the place of any corner open by more than `RESIDUAL`, and beyond 10 %
    of the frame or 5°.
    """
    if moving.shape != fixed.shape:
        return _refused(state("view_sizes", moving=_size(moving.shape), fixed=_size(fixed.shape)))
    if min(fixed.shape) < _SMALLEST:
        return _refused(state("view_small", size=_size(fixed.shape)))
    if not np.isfinite(moving).any() or not np.isfinite(fixed).any():
        return _refused(state("view_no_temperatures"))
    shape = (fixed.shape[0], fixed.shape[1])
    raw_move, raw_fix = (np.asarray(image - np.nanmedian(image), np.float32) for image in (moving, fixed))
    move, fix, cut = _comparable(raw_move, raw_fix)
    if cut <= 0:
        return _refused(state("view_nothing", marks=state("marks")))
    try:
        matrix = _coarse_to_fine(move, fix, _start(move, fix))
        for _ in range(_ROUNDS):
            move, fix, cut = _comparable(_warped(raw_move, matrix, shape), raw_fix)
            alike = _alike(move, fix)
            matrix = _after(_ecc(move, fix, np.eye(2, 3), alike), matrix)
    except cv2.error:  # the iteration lost all correlation
        return _refused(state("view_not_alike", same_view=state("same_view"), marks=state("marks")))
    move, fix, cut = _comparable(_warped(raw_move, matrix, shape), raw_fix)
    alike = _alike(move, fix)
    correlation = float(np.corrcoef(move[alike > 0], fix[alike > 0])[0, 1])
    noises = _noise(raw_move) / cut, _noise(raw_fix) / cut
    return _judged(matrix, correlation, _open_by(move, fix, alike, noises, _moved(matrix, shape)), shape)


def laid_over(image: NDArray[Any], registration: Registration, shape: tuple[int, int] | None = None) -> Image:
    """A frame (rows, columns) resampled on the grid of the fixed one, bilinear; NaN beyond it and next to its NaN."""
    rows, columns = shape or (image.shape[0], image.shape[1])
    return _warped(np.asarray(image, np.float32), registration.matrix, (rows, columns))


def _judged(matrix: NDArray[np.float64], correlation: float, open_by: float, shape: tuple[int, int]) -> Registration:
    rows, columns = shape
    centre = np.array([(columns - 1) / 2, (rows - 1) / 2, 1.0])
    dx, dy = (matrix @ centre - centre[:2]).tolist()
    rotation = degrees(np.arctan2(matrix[1, 0], matrix[0, 0]))
    reason = _against(correlation, open_by, hypot(dx, dy), abs(rotation), most=_LARGEST_SHIFT * min(rows, columns))
    return Registration(matrix, correlation, (dx, dy), rotation, reason is None, reason or "")


def _against(correlation: float, open_by: float, shift: float, rotation: float, *, most: float) -> str | None:
    """Why two frames laid over each other are not compared, and what would help; None where nothing speaks against it.

    `shift` [px], `most` is what it may be, and `rotation` [°] are magnitudes.
    """
    same_view, marks = state("same_view"), state("marks")
    if not correlation >= LEAST_CORRELATION:
        told, least = f"{correlation:.2f}", f"{LEAST_CORRELATION:g}"
        if not open_by <= RESIDUAL:
            return state("view_correlation_bare", correlation=told, least=least, same_view=same_view, marks=marks)
        return state("view_correlation", correlation=told, least=least, same_view=same_view)
    if not open_by <= RESIDUAL:
        return state("view_bare", marks=marks)
    if shift > most:
        return state("view_moved", shift=f"{shift:.0f}", same_view=same_view)
    if rotation > _LARGEST_ROTATION:
        return state("view_turned", angle=f"{rotation:.1f}", most=f"{_LARGEST_ROTATION:g}", same_view=same_view)
    return None


def _refused(reason: str) -> Registration:
    nan = float("nan")
    return Registration(np.full((2, 3), nan), nan, (nan, nan), nan, False, reason)


def _size(shape: tuple[int, ...]) -> str:
    return f"{shape[1]} × {shape[0]}"


def _comparable(move: Image, fix: Image) -> tuple[Image, Image, float]:
    """Both pictures as what a registration can go by, in units of what is returned last; 0 where either is unknown.

    Without noise, and without what is large and may have drifted, over the same pixels, so that what lies at the
    border of one is not taken for structure; cut to −1…1 at the strength of the fainter one.
    """
    known = np.isfinite(move) & np.isfinite(fix)
    if not known.any():
        return np.zeros_like(fix), np.zeros_like(fix), 0.0
    weight = known.astype(np.float32)
    structures = []
    for image in (move, fix):
        filled = np.where(known, image, np.float32(0))
        fine, large = (
            cv2.GaussianBlur(filled, (0, 0), sigma) / np.maximum(cv2.GaussianBlur(weight, (0, 0), sigma), 1e-3)
            for sigma in (_SMOOTHING, _coarse(fix.shape))
        )
        structures.append(np.where(known, fine - large, np.float32(0)))
    cut = min(float(np.percentile(np.abs(one[known]), _COMMON)) for one in structures)
    move, fix = (np.clip(one / max(cut, 1e-9), -1, 1).astype(np.float32) for one in structures)
    return move, fix, cut


def _coarse(shape: tuple[int, ...]) -> float:
    """Standard deviation [px] of the blur that keeps what is large."""
    return max(min(shape) / 16, 4 * _SMOOTHING)


def _noise(image: NDArray[Any]) -> float:
    """Standard deviation of white noise, after J. Immerkær (1996), Computer Vision and Image Understanding 64:300."""
    kernel = np.array([[1, -2, 1], [-2, 4, -2], [1, -2, 1]], np.float32)
    filled = np.asarray(image - np.nanmedian(image[np.isfinite(image)]), np.float32)
    response = cv2.filter2D(filled, cv2.CV_32F, kernel)[1:-1, 1:-1]
    response = response[np.isfinite(response)]
    return 1.4826 * float(np.median(np.abs(response))) / 6 if response.size else float("nan")


def _start(move: Image, fix: Image) -> NDArray[np.float64]:
    """A first guess: of several rotations and all shifts of whole pixels, the one that correlates best."""
    shape = (fix.shape[0], fix.shape[1])
    reach = ceil(_REACH * min(shape))
    best, highest = _about_centre(0.0, (0.0, 0.0), shape), -np.inf
    for angle in _STARTS:
        turned = np.nan_to_num(_warped(move, _about_centre(angle, (0.0, 0.0), shape), shape))
        around = cv2.copyMakeBorder(turned, *(reach,) * 4, cv2.BORDER_CONSTANT, value=0.0)
        likeness = cv2.matchTemplate(around, fix, cv2.TM_CCORR_NORMED)
        _, peak, _, (x, y) = cv2.minMaxLoc(likeness)
        if peak > highest:
            # What lies at p + d in the turned picture lies at R(p + d) in the moving one.
            dx, dy = x - reach, y - reach
            c, s = cos(radians(angle)), sin(radians(angle))
            best, highest = _about_centre(angle, (c * dx - s * dy, s * dx + c * dy), shape), peak
    return best


def _about_centre(angle: float, shift: tuple[float, float], shape: tuple[int, int]) -> NDArray[np.float64]:
    """The matrix that turns by `angle` [°] about the centre of a frame and then shifts."""
    x, y = (shape[1] - 1) / 2, (shape[0] - 1) / 2
    c, s = cos(radians(angle)), sin(radians(angle))
    return np.array([[c, -s, x - c * x + s * y + shift[0]], [s, c, y - s * x - c * y + shift[1]]])


def _coarse_to_fine(move: Image, fix: Image, matrix: NDArray[np.float64]) -> NDArray[np.float64]:
    """From coarse to fine, so that a start some pixels off still climbs the right hill.

    A size at which the iteration loses its way, structure being too small there, is passed over.
    """
    away = _ASTRAY * max(fix.shape)
    for factor in (4, 2, 1):
        rows, columns = fix.shape[0] // factor, fix.shape[1] // factor
        if factor > 1 and min(rows, columns) < _SMALLEST:
            continue
        small = [
            cv2.resize(picture[: rows * factor, : columns * factor], (columns, rows), interpolation=cv2.INTER_AREA)
            for picture in (move, fix)
        ]
        # Pixel centres at integers: the centre of the first coarse pixel lies at (factor − 1)/2.
        linear, offset = matrix[:, :2], np.full(2, (factor - 1) / 2)
        there = np.column_stack([linear, (linear @ offset + matrix[:, 2] - offset) / factor])
        try:
            there = _ecc(np.asarray(small[0], np.float32), np.asarray(small[1], np.float32), there)
        except cv2.error:
            continue
        linear = there[:, :2]
        found = np.column_stack([linear, factor * there[:, 2] + offset - linear @ offset])
        if _moved(found - matrix + np.eye(2, 3), (fix.shape[0], fix.shape[1])).max() < away:
            matrix = found
    return matrix


def _ecc(
    move: Image, fix: Image, matrix: NDArray[np.float64], mask: NDArray[np.uint8] | None = None
) -> NDArray[np.float64]:
    start = matrix.astype(np.float32)
    mask = np.ones(move.shape, np.uint8) if mask is None else mask
    _, found = cv2.findTransformECC(fix, move, start, cv2.MOTION_EUCLIDEAN, _STEPS, mask, 3)
    return np.asarray(found, np.float64)


def _after(first: NDArray[np.float64], then: NDArray[np.float64]) -> NDArray[np.float64]:
    """The matrix of one mapping after another."""
    return np.column_stack([then[:, :2] @ first[:, :2], then[:, :2] @ first[:, 2] + then[:, 2]])


def _alike(laid: Image, fix: Image) -> NDArray[np.uint8]:
    """Pixels that steer the fit, 1 where the two agree within noise and half a pixel, and not all 0."""
    known = (laid != 0) | (fix != 0)
    difference = cv2.GaussianBlur(laid - fix, (0, 0), 2 * _SMOOTHING)
    spread = 1.4826 * float(np.median(np.abs(difference[known]))) if known.any() else 0.0
    shared = np.minimum(np.hypot(*_gradient(laid)), np.hypot(*_gradient(fix)))
    apart = (np.abs(difference) > _EXTREME * spread + 0.5 * shared).view(np.uint8)
    reach = 2 * round(_coarse(fix.shape) / 2) + 1
    near = cv2.dilate(apart, np.ones((reach, reach), np.uint8))
    alike = np.asarray(known & (near == 0), np.uint8)
    return alike if 2 * np.count_nonzero(alike) > np.count_nonzero(known) else np.asarray(known, np.uint8)


def _moved(matrix: NDArray[np.float64], shape: tuple[int, int]) -> NDArray[np.float64]:
    """How far each pixel lies from where the same pixel of the sensor is [px]."""
    y, x = np.mgrid[: shape[0], : shape[1]]
    dx, dy = (row[0] * x + row[1] * y + row[2] for row in matrix - np.eye(2, 3))
    return np.asarray(np.hypot(dx, dy))


def _open_by(
    laid: Image, fix: Image, alike: NDArray[np.uint8], noises: tuple[float, float], moved: NDArray[np.float64]
) -> float:
    """Standard error [px] of the place of the frame's worst corner along its weakest direction; infinite: any place.

    Cramér and Rao's bound for a shift and a rotation from the gradients that the two pictures share: what only one of
    them has, noise or a leak, averages out of their product.  Noise of the sensor itself repeats where a pixel is laid
    on itself, shows no shift whatever the camera did, and is subtracted as if all noise were of that kind.
    """
    rows, columns = fix.shape
    inner = cv2.erode(alike, np.ones((3, 3), np.uint8), borderValue=0).view(np.bool_)
    y, x = np.mgrid[:rows, :columns].astype(np.float32)
    x, y = x[inner] - (columns - 1) / 2, y[inner] - (rows - 1) / 2
    sides = []
    for picture in (laid, fix):
        gx, gy = (gradient[inner] for gradient in _gradient(picture))
        sides.append(np.stack([gx, gy, x * gy - y * gx]).astype(np.float64))
    shared = sides[0] @ sides[1].T
    shared = (shared + shared.T) / 2
    # Central differences of noise blurred by σ have variance (1 − exp(−1/σ²))/(8πσ²): that of two of its values 2 px
    # apart, a quarter of twice (1 − ρ).
    repeated = noises[0] * noises[1] * (1 - np.exp(-1 / _SMOOTHING**2)) / (8 * pi * _SMOOTHING**2)
    still = moved[inner] < 2 * _SMOOTHING
    shared -= repeated * np.diag([still.sum(), still.sum(), float((x**2 + y**2)[still].sum())])
    half = hypot(rows, columns) / 2
    scale = np.array([1.0, 1.0, half])  # so that all three are pixels at a corner
    information = shared / np.outer(scale, scale)
    if not np.linalg.eigvalsh(information)[0] > 0:
        return float("inf")
    covariance = (noises[0] ** 2 + noises[1] ** 2) * np.linalg.inv(information)
    worst = 0.0
    for cx, cy in ((-columns, -rows), (columns, -rows)):  # and their opposites, alike
        place = np.array([[1, 0, -cy / (2 * half)], [0, 1, cx / (2 * half)]])
        worst = max(worst, float(np.linalg.eigvalsh(place @ covariance @ place.T)[-1]))
    return sqrt(worst)


def _gradient(picture: Image) -> tuple[Image, Image]:
    down, right = np.gradient(picture)
    return np.asarray(right), np.asarray(down)


def _warped(image: Image, matrix: NDArray[np.float64], shape: tuple[int, int]) -> Image:
    flags = cv2.INTER_LINEAR | cv2.WARP_INVERSE_MAP
    size = (shape[1], shape[0])
    return np.asarray(
        cv2.warpAffine(image, matrix, size, flags=flags, borderMode=cv2.BORDER_CONSTANT, borderValue=float("nan")),
        np.float32,
    )
