"use strict";

// A frame's picture again from its data, in other colours, over another range, or under other assumptions.  What is
// inked in the picture, outlines and numbers, stays where it is.
const Painting = (() => {
  const BAR = { left: 12, right: 28, top: 34, bottom: 10, tick: 5, text: 37, room: 24 }; // of the colour scale [px]
  const INK = "rgb(18, 24, 33)";

  // Colours of a table as they lie in the bytes of an image: red, green, blue, opaque.
  function packedColours(base64) {
    const bytes = Uint8Array.from(atob(base64), (letter) => letter.charCodeAt(0));
    const colour = (k) => ((255 << 24) | (bytes[3 * k + 2] << 16) | (bytes[3 * k + 1] << 8) | bytes[3 * k]) >>> 0;
    return Uint32Array.from({ length: bytes.length / 3 }, (_, k) => colour(k));
  }

  class Painter {
    constructor(data, image, canvas) {
      Object.assign(this, { data, image, canvas });
    }

    // `beyond`: whether the frame goes on below and above the range.
    paint(frame, [low, high], beyond, colormap) {
      const { picture, columns, rows } = this.data;
      const pen = this.canvas.getContext("2d", { willReadFrequently: true });
      const palette = packedColours(Page.shared.colormaps[colormap]);
      const inks = packedColours(Page.shared.inks);
      this.inked ??= this.inkOf(pen, new Set(inks));
      const scale = (palette.length - 1) / (high - low);
      const colour = (t) => (Number.isNaN(t) ? inks[0]
        : palette[Math.round(Math.min(Math.max((t - low) * scale, 0), palette.length - 1))]);
      const byIndex = frame.lookUp.map((levels) => Uint32Array.from(levels, colour));
      const image = new ImageData(new Uint8ClampedArray(this.inked), picture.width, picture.height);
      const pixels = new Uint32Array(image.data.buffer);
      for (let y = 0; y < rows * picture.factor; y += 1) {
        const row = Math.floor(y / picture.factor) * columns;
        for (let x = 0, at = y * picture.width; x < columns * picture.factor; x += 1, at += 1) {
          if (pixels[at] !== 0) continue; // inked
          const k = row + Math.floor(x / picture.factor);
          pixels[at] = byIndex[Frames.opticsAt(frame, k)][frame.index[k]];
        }
      }
      pen.putImageData(image, 0, 0);
      this.paintScale(pen, [low, high], beyond, palette);
    }

    // The picture with everything but its inks made transparent; empty where it is not the picture that was described.
    inkOf(pen, inks) {
      const { picture, columns, rows } = this.data;
      if (this.image.naturalWidth !== picture.width || this.image.naturalHeight !== picture.height) {
        return new Uint8ClampedArray(4 * picture.width * picture.height);
      }
      pen.drawImage(this.image, 0, 0);
      const { data } = pen.getImageData(0, 0, picture.width, picture.height);
      const pixels = new Uint32Array(data.buffer);
      for (let k = 0; k < pixels.length; k += 1) {
        const isMap = k % picture.width < columns * picture.factor && k < rows * picture.factor * picture.width;
        if (!isMap || !inks.has(pixels[k])) pixels[k] = 0;
      }
      return data;
    }

    paintScale(pen, ends, beyond, palette) {
      const { picture, columns } = this.data;
      const left = columns * picture.factor;
      const rows = picture.height - BAR.top - BAR.bottom;
      const bar = new ImageData(BAR.right - BAR.left, rows);
      const pixels = new Uint32Array(bar.data.buffer);
      for (let k = 0; k < pixels.length; k += 1) {
        const up = 1 - Math.floor(k / bar.width) / (rows - 1);
        pixels[k] = palette[Math.round(up * (palette.length - 1))];
      }
      pen.fillStyle = "white";
      pen.fillRect(left, 0, picture.width - left, picture.height);
      pen.putImageData(bar, left + BAR.left, BAR.top);
      pen.fillStyle = INK;
      pen.font = "15px system-ui, sans-serif";
      pen.textBaseline = "middle";
      pen.fillText(Page.shared.show.temperature.symbol, left + BAR.left, BAR.top / 2 - 2);
      for (const { at, text } of Scales.marks(ends, beyond, BAR.room / rows)) {
        const y = BAR.top + Math.round((rows - 1) * (1 - at));
        pen.fillRect(left + BAR.right, y, BAR.tick, 1);
        pen.fillText(text, left + BAR.text, y, picture.width - left - BAR.text);
      }
    }
  }

  return { Painter, packedColours };
})();
