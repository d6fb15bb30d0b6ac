"use strict";

// What a reader draws on a picture, in one ink, and the profile along a line.
const Drawings = (() => {
  const RING = 7; // radius of the mark where a reading is taken [px of the picture]
  const PROFILE = { width: 340, height: 120, left: 6, right: 334, top: 18, bottom: 104 };

  // One light line between two dark ones, legible on any colour; `cursor` null: no mark.
  function drawShape(canvas, factor, { tool, points, isClosed, cursor }) {
    const pen = canvas.getContext("2d");
    const centre = ([x, y]) => [(x + 0.5) * factor, (y + 0.5) * factor];
    const path = new Path2D();
    if (cursor) path.arc(...centre(cursor), RING, 0, 2 * Math.PI);
    if (tool === "box" && points.length === 2) {
      const [[x1, y1], [x2, y2]] = points;
      path.rect(Math.min(x1, x2) * factor, Math.min(y1, y2) * factor,
        (Math.abs(x2 - x1) + 1) * factor, (Math.abs(y2 - y1) + 1) * factor);
    } else if (points.length) {
      path.moveTo(...centre(points[0]));
      points.slice(1).forEach((point) => path.lineTo(...centre(point)));
      if (tool === "outline" && isClosed) path.closePath();
    }
    pen.clearRect(0, 0, canvas.width, canvas.height);
    for (const [ink, width] of [["rgb(18, 24, 33)", 5], ["white", 2]]) {
      pen.strokeStyle = ink;
      pen.lineWidth = width;
      pen.stroke(path);
    }
  }

  function svg(tag, attributes, text = "") {
    const node = document.createElementNS("http://www.w3.org/2000/svg", tag);
    Object.entries(attributes).forEach(([name, value]) => node.setAttribute(name, value));
    node.textContent = text;
    return node;
  }

  // Temperatures [K] along a line; where there is none the curve is broken.
  function profile({ along, min, max }) {
    const told = { min: Page.shown("temperature", min, 1), max: Page.shown("temperature", max, 1) };
    const { width, height, left, right, top, bottom } = PROFILE;
    const across = (right - left) / Math.max(along.length - 1, 1);
    const up = (bottom - top) / (max - min || 1);
    const path = along.map((t, k) => {
      if (Number.isNaN(t)) return "";
      const isBroken = k === 0 || Number.isNaN(along[k - 1]);
      return `${isBroken ? "M" : "L"}${(left + across * k).toFixed(1)} ${(bottom - up * (t - min)).toFixed(1)}`;
    }).join("");
    const label = Page.say("profile", told);
    const plot = svg("svg", { viewBox: `0 0 ${width} ${height}`, role: "img", "aria-label": label });
    plot.append(
      svg("path", { class: "live-axis", d: `M${left} ${top}H${right}M${left} ${bottom}H${right}` }),
      svg("path", { class: "live-curve", d: path }),
      svg("text", { x: left, y: top - 5 }, told.max),
      svg("text", { x: left, y: bottom + 13 }, told.min),
    );
    return plot;
  }

  return { drawShape, profile };
})();
