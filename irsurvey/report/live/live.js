"use strict";

// The tools of each frame's sheet: reading the picture, its colours, and what other assumptions would do.  Nothing here
// alters what is reported, and nothing is asked of any network.
const Live = (() => {
  const CLICK = 4; // a press that moved less is a click [px of the screen]
  const NEAR = 6; // a corner this near to the first one closes an outline [px of the picture]
  const TOOLS = ["read", "box", "outline", "line"];
  const STEPS = { ArrowLeft: [-1, 0], ArrowRight: [1, 0], ArrowUp: [0, -1], ArrowDown: [0, 1] };

  const { shared, say, shown, rounded, el, labelled, numberField, numberOf, written, markInvalid } = Page;
  const FIGURES = 3; // of a heat flux: its film coefficient is not known to more
  const sheets = new Map();

  function clamp(value, low, high) {
    return Math.min(Math.max(value, low), high);
  }

  class Sheet {
    constructor(data, image) {
      this.data = data;
      this.image = image;
      this.tool = "read";
      this.cursor = [data.columns >> 1, data.rows >> 1]; // where the keyboard begins; marked once somebody points
      this.isOver = false; // the pointer, over the map
      this.kept = null; // where the reader pressed, or went by keys: read on when the pointer is gone
      this.points = [];
      this.isClosed = false;
      this.range = [data.picture.low, data.picture.high];
      [this.colormap] = Object.keys(shared.colormaps);
      this.build();
    }

    // ---- what stands on the sheet

    build() {
      const { picture, id } = this.data;
      const size = { width: picture.width, height: picture.height };
      const hint = Page.uniqueId();
      this.colours = el("canvas", { class: "live-colours", "aria-hidden": "true", hidden: true, ...size });
      this.ink = el("canvas", {
        class: "live-ink", tabindex: "0", role: "application", "aria-label": say("canvas", { frame: id }),
        "aria-describedby": hint, ...size,
      });
      this.badge = el("p", { class: "live-badge", hidden: true, "aria-hidden": "true" }, say("what_if"));
      const stage = el("div", { class: "live-stage" });
      this.image.replaceWith(stage);
      stage.append(this.image, this.colours, this.ink, this.badge);
      this.painter = new Painting.Painter(this.data, this.image, this.colours);
      this.panel = new Panels.Panel(this.data, () => this.refresh());
      this.hint = el("p", { class: "live-hint", id: hint });
      this.readout = el("p", { class: "live-readout" });
      this.sure = el("p", { class: "live-sure" });
      this.scale = new Scales.Narrow();
      this.spoken = el("p", { class: "live-spoken", "aria-live": "polite" });
      this.profile = el("div", { class: "live-profile" });
      this.tools = el("section", { class: "live", "aria-label": `${say("tools")}: ${id}` },
        this.scale.node, this.toolBar(), this.hint, this.readout, this.sure, this.profile, this.colourBar(), this.panel.node, this.spoken);
      stage.after(this.tools);
      this.listen();
      this.chooseTool("read");
    }

    toolBar() {
      const name = Page.uniqueId();
      const choices = TOOLS.map((tool) => {
        const input = el("input", { type: "radio", name, value: tool, on: { change: () => this.chooseTool(tool) } });
        input.checked = tool === "read";
        return el("label", { class: "live-choice" }, input, el("span", {}, say(tool)));
      });
      const button = (key, click, more) => el("button", { type: "button", ...more, on: { click } }, say(key));
      this.closeButton = button("close_outline", () => this.close(), { hidden: true });
      this.clearButton = button("clear", () => this.clear(), { hidden: true });
      this.backButton = button("back", () => this.reset(), { class: "live-back", disabled: true });
      return el("div", { class: "live-bar" },
        el("fieldset", {}, el("legend", {}, say("tool")), ...choices),
        this.closeButton, this.clearButton, this.backButton);
    }

    colourBar() {
      const { factor, shift, symbol } = shared.show.temperature;
      this.toShown = (kelvin) => (kelvin * factor + shift).toFixed(1);
      this.toKelvin = (number) => (number - shift) / factor;
      const options = Object.keys(shared.colormaps).map((name) => el("option", { value: name }, name));
      this.select = el("select", { on: { change: () => this.recolour() } }, ...options);
      this.ends = this.range.map((end) =>
        numberField(written(this.toShown(end)), 0.1, () => this.rerange(this.ends, this.sliders)));
      this.sliders = ["slide_lowest", "slide_highest"].map((key) => el("input", {
        type: "range", step: "0.1", "aria-label": say(key), on: { input: () => this.rerange(this.sliders, this.ends) },
      }));
      const end = (key, k) => labelled(say(key), this.ends[k], el("span", {}, symbol), this.sliders[k]);
      return el("div", { class: "live-colour-bar" },
        labelled(say("colours"), this.select), end("lowest", 0), end("highest", 1));
    }

    listen() {
      const act = (event, handler) => this.ink.addEventListener(event, (given) => {
        this.open().then(() => handler.call(this, given));
      });
      act("pointerdown", this.pressed);
      act("pointermove", this.moved);
      act("pointerup", this.released);
      act("pointercancel", this.released);
      act("pointerleave", () => this.pointAt(null));
      this.ink.addEventListener("keydown", (event) => {
        const key = event.key === " " ? "Enter" : event.key;
        if (!(key in STEPS) && !["Enter", "Escape"].includes(key)) return;
        event.preventDefault();
        this.open().then(() => this.typed(key, event.shiftKey));
      });
      act("focus", () => this.tell());
      act("blur", () => this.tell());
      this.tools.addEventListener("focusin", () => this.open());
      new IntersectionObserver((seen, observer) => {
        if (!seen.some((entry) => entry.isIntersecting)) return;
        observer.disconnect();
        this.open();
      }, { rootMargin: "200px" }).observe(this.ink);
    }

    // ---- the data, opened when they are first needed

    async open() {
      this.opening ??= Promise.all([
        Frames.open(this.data, shared),
        this.image.decode().catch(() => {}), // a picture that cannot be shown has no inks to keep
      ]).then(([frame]) => {
        this.frame = frame;
        const last = frame.levels.length - 1; // levels ascend
        this.sliders.forEach((slider, end) => {
          slider.min = this.toShown(Math.min(frame.levels[1], this.range[0]) - 1);
          slider.max = this.toShown(Math.max(frame.levels[last], this.range[1]) + 1);
          slider.value = this.toShown(this.range[end]);
        });
        this.look();
      });
      await this.opening;
      return this;
    }

    refresh() {
      return this.open().then(() => this.look());
    }

    // Everything again under the assumptions as they are now.
    look() {
      this.view = Frames.under(this.frame, this.panel.changes);
      this.frame.lookUp = Frames.lookUpOf(this.view);
      this.reference = Frames.referenceOf(this.view);
      this.tools.classList.toggle("live-what-if", !this.view.isStored);
      this.badge.hidden = this.view.isStored;
      this.panel.tell(this.view, this.reference, this.view.isStored ? 0 : Frames.lost(this.frame));
      if (!this.view.isStored) {
        this.placeBadge();
        this.spoken.textContent = this.panel.banner.textContent;
      }
      this.colours.hidden = !this.isRepainted();
      const beyond = Scales.beyondOf(this.frame, this.range);
      if (this.isRepainted()) this.painter.paint(this.frame, this.range, beyond, this.colormap);
      this.scale.show(this.range, beyond, Painting.packedColours(shared.colormaps[this.colormap]));
      this.tell();
    }

    isRepainted() {
      const { low, high } = this.data.picture;
      const isMoved = Math.abs(this.range[0] - low) > 1e-6 || Math.abs(this.range[1] - high) > 1e-6;
      return isMoved || this.colormap !== Object.keys(shared.colormaps)[0] || !this.view.isStored;
    }

    // The badge stands in a corner of the map that holds neither the hottest nor the coldest pixel.
    placeBadge() {
      const { columns, rows, picture } = this.data;
      const taken = Frames.extremes(this.frame).map(([x, y]) => `${x >= columns / 2} ${y >= rows / 2}`);
      const corners = [[false, false], [true, false], [false, true], [true, true]];
      const [isRight, isLow] = corners.find((corner) => !taken.includes(corner.join(" ")));
      const beside = `${(1 - (columns * picture.factor) / picture.width) * 100}%`;
      const below = `${(1 - (rows * picture.factor) / picture.height) * 100}%`;
      Object.assign(this.badge.style, {
        left: isRight ? "auto" : "0", right: isRight ? beside : "auto",
        top: isLow ? "auto" : "0", bottom: isLow ? below : "auto",
      });
    }

    // ---- tools

    chooseTool(tool) {
      this.tool = tool;
      this.hint.textContent = say(`hint_${tool}`);
      this.ink.classList.toggle("live-draws", tool !== "read");
      this.clear();
    }

    clear() {
      this.points = [];
      this.isClosed = false;
      this.kept = null;
      this.tell();
    }

    close() {
      this.isClosed = this.points.length > 2;
      this.tell(true);
    }

    reset() {
      this.panel.reset();
      [this.colormap] = Object.keys(shared.colormaps);
      this.select.value = this.colormap;
      this.range = [this.data.picture.low, this.data.picture.high];
      this.ends.forEach((input, end) => {
        input.value = written(this.toShown(this.range[end]));
        this.sliders[end].value = this.toShown(this.range[end]);
        markInvalid(input, false);
      });
      this.points = [];
      this.isClosed = false;
      this.kept = null;
      this.spoken.textContent = "";
      this.refresh();
    }

    recolour() {
      this.colormap = this.select.value;
      this.refresh();
    }

    rerange(changed, others) {
      const numbers = changed.map((input) => numberOf(input.value));
      const isGood = numbers[0] < numbers[1];
      this.ends.forEach((input) => markInvalid(input, !isGood));
      if (!isGood) return;
      this.range = numbers.map(this.toKelvin);
      others.forEach((input, end) => {
        input.value = others === this.ends ? written(numbers[end].toFixed(1)) : numbers[end];
      });
      this.refresh();
    }

    // The pixel under a pointer, null beside the map; `isHeld`: the nearest one.
    pixelOf(event, isHeld) {
      const { picture, columns, rows } = this.data;
      const box = this.ink.getBoundingClientRect();
      const x = Math.floor((event.clientX - box.left) / box.width * picture.width / picture.factor);
      const y = Math.floor((event.clientY - box.top) / box.height * picture.height / picture.factor);
      if (isHeld) return [clamp(x, 0, columns - 1), clamp(y, 0, rows - 1)];
      return x >= 0 && y >= 0 && x < columns && y < rows ? [x, y] : null;
    }

    pressed(event) {
      const pixel = this.pixelOf(event);
      if (!pixel || event.button > 0) return;
      this.cursor = pixel;
      if (this.tool === "read") this.kept = pixel;
      else if (this.tool === "outline") this.addCorner(pixel);
      else {
        const isSecond = this.points.length === 1;
        this.points = isSecond ? [this.points[0], pixel] : [pixel];
        this.isClosed = isSecond;
        this.pressedAt = isSecond ? null : [event.clientX, event.clientY];
        if (this.pressedAt) this.capture(event.pointerId);
      }
      this.tell();
    }

    capture(pointer) {
      try {
        this.ink.setPointerCapture(pointer);
      } catch {
        // the pointer is gone already: the drag ends where it was last seen
      }
    }

    moved(event) {
      const pixel = this.pixelOf(event, Boolean(this.pressedAt));
      if (!this.pressedAt) {
        this.pointAt(pixel);
        return;
      }
      this.points = [this.points[0], pixel];
      this.tell();
    }

    // Read where the pointer is; where it is over no pixel of the map, what was kept.
    pointAt(pixel) {
      if (this.tool !== "read") return;
      this.isOver = pixel !== null;
      this.cursor = pixel ?? this.kept ?? this.cursor;
      this.tell();
    }

    // Read at a pixel until something else is read.
    keep(pixel) {
      this.kept = pixel;
      this.pointAt(null);
    }

    released(event) {
      if (!this.pressedAt) return;
      this.isClosed = Math.hypot(event.clientX - this.pressedAt[0], event.clientY - this.pressedAt[1]) >= CLICK;
      this.points = this.isClosed ? [this.points[0], this.pixelOf(event, true)] : [this.points[0]];
      this.pressedAt = null;
      this.tell();
    }

    addCorner(pixel) {
      const [first] = this.points;
      if (this.isClosed) this.clear();
      else if (this.points.length > 2) {
        const away = Math.hypot(pixel[0] - first[0], pixel[1] - first[1]) * this.data.picture.factor;
        this.isClosed = away <= NEAR;
        if (this.isClosed) return;
      }
      this.points = [...this.points, pixel];
    }

    typed(key, isFast) {
      const [dx, dy] = (STEPS[key] ?? [0, 0]).map((step) => step * (isFast ? 10 : 1));
      const { columns, rows } = this.data;
      this.cursor = [clamp(this.cursor[0] + dx, 0, columns - 1), clamp(this.cursor[1] + dy, 0, rows - 1)];
      if (key === "Escape") this.clear();
      else if (this.tool === "read") this.kept = this.cursor;
      if (key === "Enter" && this.tool === "outline") this.addCorner(this.cursor);
      else if (key === "Enter" && this.tool !== "read") {
        this.isClosed = this.points.length === 1;
        this.points = this.isClosed ? [this.points[0], this.cursor] : [this.cursor];
      }
      this.tell(true);
    }

    // ---- readings

    // What is read where the reader points or has drawn, in SI units; null where nobody points and nothing is drawn.
    reading() {
      if (this.tool === "read") return this.isPointed() ? { at: this.cursor, ...this.readingAt(this.cursor) } : null;
      const pixels = this.pixels();
      return pixels.length ? Frames.over(this.frame, this.reference, pixels, this.tool === "line") : null;
    }

    isPointed() {
      return this.isOver || this.kept !== null || document.activeElement === this.ink;
    }

    pixels() {
      if (this.tool === "outline") return this.isClosed ? Shapes.ofOutline(this.points) : [];
      if (this.points.length < 2) return [];
      return this.tool === "box" ? Shapes.ofBox(...this.points) : Shapes.ofLine(...this.points);
    }

    readingAt([x, y]) {
      const t = Frames.temperatureAt(this.frame, x, y);
      return {
        temperature: t,
        delta: this.reference ? t - this.reference.at(x, y) : null,
        flux: Frames.fluxAt(this.view, x, y),
        reflective: !(Frames.emissivityAt(this.view, x, y) >= shared.constants.least_emissivity),
      };
    }

    // Say what is read, draw where; aloud where a key asked for it.
    tell(isSpoken = false) {
      if (!this.frame) return;
      const { tool, points, isClosed, cursor } = this;
      const reading = this.reading();
      const words = reading === null ? "" : tool === "read" ? this.wordsOfPixel(reading) : this.wordsOfArea(reading);
      const told = words && !this.view.isStored ? `${say("what_if")}: ${words}` : words;
      this.readout.textContent = told || "\u00a0";
      if (isSpoken) this.spoken.textContent = told || say("at", { x: cursor[0], y: cursor[1] });
      this.sure.textContent = (reading?.at && this.wordsOfSureness(reading)) || "\u00a0";
      this.sure.hidden = tool !== "read";
      const hasProfile = reading?.along && reading.missing < reading.pixels;
      this.profile.replaceChildren(...(hasProfile ? [Drawings.profile(reading)] : []));
      const isDrawing = !isClosed && (points.length > 0 || document.activeElement === this.ink);
      const mark = (tool === "read" ? this.isPointed() : isDrawing) ? cursor : null;
      Drawings.drawShape(this.ink, this.data.picture.factor, { tool, points, isClosed, cursor: mark });
      this.closeButton.hidden = tool !== "outline" || isClosed || points.length < 3;
      this.clearButton.hidden = !points.length && !this.kept;
      this.backButton.disabled = !this.isRepainted() && !points.length;
    }

    wordsOfPixel({ at: [x, y], temperature, delta, flux, reflective }) {
      const place = say("at", { x, y });
      if (Number.isNaN(temperature)) return `${say("not_measurable")} · ${place}`;
      const parts = [shown("temperature", temperature)];
      parts.push(delta === null ? say("no_reference") : say("to_reference", { delta: shown("delta", delta) }));
      if (!Number.isNaN(flux)) parts.push(say("leaving", { flux: rounded("flux", flux, FIGURES) }));
      if (reflective) parts.push(say("reflective"));
      return [...parts, place].join(" · ");
    }

    // How uncertain such a reading is, by what the report says of the likest of its results; under other assumptions,
    // of shiny surfaces and where nothing is like it, nothing is said.
    wordsOfSureness({ at: [x, y], temperature, reflective }) {
      if (!this.view.isStored || reflective) return "";
      const { frame } = this;
      const like = Frames.likest(this.view, temperature, Frames.opticsAt(frame, y * frame.data.columns + x));
      return like ? say("sure", { u: like.u, name: like.name ?? say("the_reference") }) : "";
    }

    wordsOfArea({ pixels, missing, min, mean, max, delta, along }) {
      const [first, last] = [along?.[0] ?? NaN, along?.[along.length - 1] ?? NaN].map((t) => shown("temperature", t));
      const [lowest, middle, highest] = [min, mean, max].map((t) => shown("temperature", t));
      const key = along ? "of_line" : "of_area";
      const parts = [say(key, { pixels, first, last, min: lowest, mean: middle, max: highest })];
      if (delta !== null) parts.push(say("mean_to_reference", { delta: shown("delta", delta) }));
      if (missing) parts.push(say("missing", { pixels: missing }));
      return parts.join(" · ");
    }
  }

  function start() {
    const tables = document.getElementById("live-tables");
    if (!tables) return;
    Object.assign(shared, JSON.parse(tables.textContent));
    if (typeof DecompressionStream === "undefined") return;
    for (const node of document.querySelectorAll("script.live-data")) {
      const data = JSON.parse(node.textContent);
      const image = document.getElementById(`picture-${data.id}`);
      if (image) sheets.set(data.id, new Sheet(data, image));
    }
  }

  start();
  return { sheets, shared };
})();
