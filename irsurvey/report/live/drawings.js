"use strict";

// What a reader draws on a picture, in one ink, and the profile along a line.
const Drawings = (() => {
  const RING = 7; // radius of the mark where a reading is taken [px of the window]
  const DOT = 5; // radius of the mark where a line starts
  const INK = "rgb(18, 24, 33)";
  const PROFILE = { width: 340, height: 140, left: 62, right: 330, top: 12, bottom: 98 };

  // One light line between two dark ones, legible on any colour; `cursor` null: no mark.
  function drawShape(canvas, factor, { tool, points, isClosed, cursor }) {
    const pen = canvas.getContext("2d");
    const grain = Math.max(1, canvas.width / (canvas.clientWidth || canvas.width)); // of the canvas for one of the window
    const centre = ([x, y]) => [(x + 0.5) * factor, (y + 0.5) * factor];
    const path = new Path2D();
    if (cursor) path.arc(...centre(cursor), RING * grain, 0, 2 * Math.PI);
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
    for (const [ink, width] of [[INK, 5], ["white", 2]]) {
      pen.strokeStyle = ink;
      pen.lineWidth = width * grain;
      pen.stroke(path);
    }
    if (tool === "line" && points.length === 2) markStart(pen, points.map(centre), grain);
  }

  // A dot where a line starts, and the word on the side that the line does not take.
  function markStart(pen, [[x, y], [toX]], grain) {
    const dot = new Path2D();
    dot.arc(x, y, DOT * grain, 0, 2 * Math.PI);
    pen.font = `600 ${13 * grain}px system-ui, sans-serif`;
    pen.textBaseline = "middle";
    pen.lineJoin = "round";
    const word = Page.say("start");
    const beside = (DOT + 4) * grain;
    const length = pen.measureText(word).width;
    const isLeft = toX > x ? x - beside - length > 0 : x + beside + length > pen.canvas.width;
    const at = isLeft ? x - beside - length : x + beside;
    const above = toX > x && !isLeft ? Math.max(y - 12 * grain, 8 * grain) : y;
    pen.strokeStyle = "white";
    pen.lineWidth = 4 * grain;
    pen.stroke(dot);
    pen.strokeText(word, at, above);
    pen.fillStyle = INK;
    pen.fill(dot);
    pen.fillText(word, at, above);
  }

  function svg(tag, attributes, text = "") {
    const node = document.createElementNS("http://www.w3.org/2000/svg", tag);
    Object.entries(attributes).forEach(([name, value]) => node.setAttribute(name, value));
    node.textContent = text;
    return node;
  }

  // Temperatures [K] along a line over its length [px], and the reference beside them; where there is no temperature
  // the curve is broken.
  function profile({ along, level, length, min, max }) {
    const { width, height, left, right, top, bottom } = PROFILE;
    const [low, high] = [Math.min(min, ...level ?? []), Math.max(max, ...level ?? [])];
    const x = (k) => left + (right - left) * k / Math.max(along.length - 1, 1);
    const y = (t) => bottom - (bottom - top) * (t - low) / (high - low || 1);
    const pathOf = (values) => values.map((t, k) => {
      if (Number.isNaN(t)) return "";
      const isBroken = k === 0 || Number.isNaN(values[k - 1]);
      return `${isBroken ? "M" : "L"}${x(k).toFixed(1)} ${y(t).toFixed(1)}`;
    }).join("");
    const text = (place, anchor, words) => svg("text", { x: place[0], y: place[1], "text-anchor": anchor }, words);
    const shown = (t) => Page.shown("temperature", t, 1);
    const label = Page.say("profile", { min: shown(min), max: shown(max) });
    const plot = svg("svg", { viewBox: `0 0 ${width} ${height}`, role: "img", "aria-label": label });
    plot.append(
      svg("path", { class: "live-axis", d: `M${left} ${top}H${right}M${left} ${top}V${bottom}H${right}` }),
      text([left - 5, top + 4], "end", shown(high)),
      text([left - 5, bottom], "end", shown(low)),
      ...lengthAxis(length),
      text([left, bottom + 34], "start", Page.say("start")),
      text([right, bottom + 34], "end", Page.say("length")),
    );
    plot.append(svg("path", { class: "live-curve", d: pathOf(along) }));
    if (level) {
      const { isLast, isBelow } = roomBeside(along, level);
      const [place, t] = isLast ? [right - 4, level.at(-1)] : [left + 10, level[0]];
      const under = y(t) + 4 > bottom - 12 ? -5 : 12;
      plot.append(svg("path", { class: "live-level", d: pathOf(level) }),
        text([place, y(t) + (isBelow || y(t) < top + 12 ? under : -5)], isLast ? "end" : "start", Page.say("level", { level: shown(t) })));
    }
    if (!Number.isNaN(along[0])) plot.append(svg("circle", { class: "live-start", cx: left, cy: y(along[0]).toFixed(1), r: 4 }));
    return plot;
  }

  // At which end of the reference, and on which side of it, the curve leaves room for a word.
  function roomBeside(along, level) {
    const above = along.map((t, k) => t - level[k]);
    const share = Math.ceil(above.length * 0.45);
    const meanOf = (values) => values.reduce((sum, one) => sum + (one || 0), 0) / values.length;
    const [first, last] = [meanOf(above.slice(0, share)), meanOf(above.slice(-share))];
    const isLast = Math.abs(last) > Math.abs(first);
    return { isLast, isBelow: (isLast ? last : first) > 0 };
  }

  // Round lengths from the start of the line.
  function lengthAxis(length) {
    const { left, right, bottom } = PROFILE;
    const step = Math.max(1, Scales.roundStep(Math.max(length, 1) / 5));
    const count = Math.floor(length / step + 1e-9);
    return Array.from({ length: count + 1 }, (_, k) => {
      const x = left + (right - left) * (length ? k * step / length : 0);
      const tick = svg("path", { class: "live-axis", d: `M${x.toFixed(1)} ${bottom}v4` });
      return [tick, svg("text", { class: "live-length", x: x.toFixed(1), y: bottom + 17, "text-anchor": "middle" }, String(k * step))];
    }).flat();
  }

  return { drawShape, profile };
})();
