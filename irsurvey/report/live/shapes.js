"use strict";

// Pixels of what a reader draws: x right, y down, pixel centres at integers, an outline belongs to what it encloses.
const Shapes = (() => {
  const ON_OUTLINE = 1e-9;

  function ofBox([x1, y1], [x2, y2]) {
    const pixels = [];
    for (let y = Math.min(y1, y2); y <= Math.max(y1, y2); y += 1) {
      for (let x = Math.min(x1, x2); x <= Math.max(x1, x2); x += 1) pixels.push([x, y]);
    }
    return pixels;
  }

  // Even-odd where an outline crosses itself.
  function ofOutline(corners) {
    const xs = corners.map(([x]) => x);
    const ys = corners.map(([, y]) => y);
    const box = ofBox([Math.ceil(Math.min(...xs)), Math.ceil(Math.min(...ys))],
      [Math.floor(Math.max(...xs)), Math.floor(Math.max(...ys))]);
    return box.filter((point) => isInside(point, corners));
  }

  function isInside([x, y], corners) {
    let inside = false;
    for (let k = 0; k < corners.length; k += 1) {
      const [x1, y1] = corners[k];
      const [x2, y2] = corners[(k + 1) % corners.length];
      const along = [x2 - x1, y2 - y1];
      const length = Math.hypot(...along);
      const off = [x - x1, y - y1];
      const away = length === 0 ? Math.hypot(...off) : Math.abs(along[0] * off[1] - along[1] * off[0]) / length;
      const part = length === 0 ? 0 : (along[0] * off[0] + along[1] * off[1]) / length ** 2;
      if (away <= ON_OUTLINE && part >= -ON_OUTLINE && part <= 1 + ON_OUTLINE) return true;
      if ((y1 > y) !== (y2 > y) && x < x1 + (y - y1) * (x2 - x1) / (y2 - y1)) inside = !inside;
    }
    return inside;
  }

  // One pixel for each step along the longer side, the nearest to the line.
  function ofLine([x1, y1], [x2, y2]) {
    const steps = Math.max(Math.abs(x2 - x1), Math.abs(y2 - y1));
    if (steps === 0) return [[x1, y1]];
    return Array.from({ length: steps + 1 }, (_, k) => [
      Math.floor(x1 + (x2 - x1) * k / steps + 0.5),
      Math.floor(y1 + (y2 - y1) * k / steps + 0.5),
    ]);
  }

  return { ofBox, ofOutline, ofLine };
})();
