"use strict";

// The numbers of a colour scale: its own ends, with ≤ or ≥ where the frame goes on beyond, and round ones between, as
// in the picture of the report; and a scale of its own for windows too narrow to read the one in the picture.
const Scales = (() => {
  const NO_TENTHS = 1000; // from here on there is no room for tenths
  const ROOM = 0.25; // of a narrow scale that one number needs

  // The smallest of …, 0.1, 0.2, 0.5, 1, 2, 5, 10, … that is not below `atLeast`.
  function roundStep(atLeast) {
    const decade = 10 ** Math.floor(Math.log10(atLeast));
    return decade * [1, 2, 5, 10].find((factor) => factor * decade >= atLeast * (1 - 1e-9));
  }

  function placesOf(step) {
    return Math.max(0, -Math.floor(Math.log10(step) + 1e-9));
  }

  // Texts with their place from 0 (low) to 1 (high); `ends` [K], `beyond` below and above, `room`: share of the scale
  // between two numbers.
  function marks(ends, beyond, room) {
    const { factor, shift } = Page.shared.show.temperature;
    const [low, high] = ends.map((end) => end * factor + shift);
    const places = Math.max(Math.abs(low), Math.abs(high)) < NO_TENTHS ? 1 : 0;
    const written = (value, digits) => Page.typeset(value.toFixed(digits).replace(/^-(0(?:\.0+)?)$/, "$1"));
    const found = [
      { at: 0, text: `${beyond[0] ? "≤\u2009" : ""}${written(low, places)}` },
      { at: 1, text: `${beyond[1] ? "≥\u2009" : ""}${written(high, places)}` },
    ];
    const step = roundStep((high - low) * room * 1.3);
    const margin = (high - low) * room;
    for (let k = Math.ceil((low + margin) / step); k <= Math.floor((high - margin) / step); k += 1) {
      found.push({ at: (k * step - low) / (high - low), text: written(k * step, placesOf(step)) });
    }
    return found;
  }

  // Whether a frame as it is looked at now has pixels below and above the ends [K], by more than temperatures travel to.
  function beyondOf(frame, [low, high]) {
    const half = frame.data.map.step / 2;
    const [coldest, hottest] = Frames.extremes(frame).map(([x, y]) => Frames.temperatureAt(frame, x, y));
    return [coldest < low - half, hottest > high + half];
  }

  // A scale below the picture, shown where the window is narrow.
  class Narrow {
    constructor() {
      this.bar = Page.el("canvas", { height: 1, "aria-hidden": "true" });
      this.numbers = Page.el("div", { class: "live-numbers", "aria-hidden": "true" });
      const unit = Page.el("span", { class: "live-unit", "aria-hidden": "true" }, Page.shared.show.temperature.symbol);
      this.node = Page.el("div", { class: "live-scale", role: "img" },
        Page.el("div", { class: "live-colours-along" }, this.bar, this.numbers), unit);
    }

    // `palette`: colours as they lie in the bytes of an image.
    show(ends, beyond, palette) {
      const [low, high] = ends.map((end) => Page.shown("temperature", end, 1));
      this.node.setAttribute("aria-label", Page.say("scale", { low, high }));
      this.bar.width = palette.length;
      const image = new ImageData(palette.length, 1);
      new Uint32Array(image.data.buffer).set(palette);
      this.bar.getContext("2d").putImageData(image, 0, 0);
      this.numbers.replaceChildren(...marks(ends, beyond, ROOM).map(({ at, text }) => {
        const node = Page.el("span", {}, text);
        node.style.left = `${100 * at}%`;
        node.style.transform = `translateX(${at === 0 ? 0 : at === 1 ? -100 : -50}%)`;
        return node;
      }));
    }
  }

  return { marks, roundStep, placesOf, beyondOf, Narrow };
})();
