"use strict";

// One frame as the page carries it: its map unpacked, and every number of it under assumptions other than those stored.
const Frames = (() => {
  const ALIKE = 5; // temperatures this near are about equally uncertain on one surface [K]

  function bytesOf(base64) {
    return Uint8Array.from(atob(base64), (letter) => letter.charCodeAt(0));
  }

  async function inflated(base64) {
    const stream = new Blob([bytesOf(base64)]).stream().pipeThrough(new DecompressionStream("deflate"));
    return new Uint8Array(await new Response(stream).arrayBuffer());
  }

  // Levels [K] by index (0: not measurable), and the index of every pixel; see `_packed` in payload.py.
  async function unpacked(data, zero) {
    const bytes = await inflated(data.map.data);
    const { count } = data.map;
    const size = data.rows * data.columns;
    const levels = new Float64Array(count + 1).fill(NaN);
    for (let k = 0; k < count; k += 1) {
      levels[k + 1] = zero + data.map.low + data.map.step * (bytes[2 * k] + 256 * bytes[2 * k + 1]);
    }
    const index = new Uint16Array(size);
    const low = bytes.subarray(2 * count, 2 * count + size);
    const high = bytes.subarray(2 * count + size);
    for (let row = 0, k = 0; row < data.rows; row += 1) {
      for (let column = 0, before = 0; column < data.columns; column += 1, k += 1) {
        const folded = low[k] + 256 * high[k];
        before = (before + ((folded >> 1) ^ -(folded & 1))) & 0xffff;
        index[k] = before;
      }
    }
    return { levels, index };
  }

  async function open(data, shared) {
    const { levels, index } = await unpacked(data, shared.constants.zero_celsius);
    const optics = data.optics ? await inflated(data.optics) : null;
    const table = tableOf(data.band, shared);
    return { data, shared, levels, index, optics, table, lookUp: data.optics_names.map(() => levels) };
  }

  const made = new Map();
  function tableOf(band, shared) {
    if (!made.has(band)) made.set(band, Physics.bandTable(shared.bands[band]));
    return made.get(band);
  }

  // Values [SI] of the scene with some changed; what was taken from another value moves with it.
  function sceneOf(frame, changes) {
    const { scene, follows } = frame.data;
    const values = {};
    const value = (name) => {
      if (name in values) return values[name];
      const leader = follows[name];
      if (name in changes) values[name] = changes[name];
      else if (leader && leader in scene) values[name] = scene[name] + value(leader) - scene[leader];
      else values[name] = scene[name];
      return values[name];
    };
    Object.keys(scene).forEach(value);
    return values;
  }

  function pathOf(frame, values) {
    const tAir = values.air;
    return {
      tAir,
      distance: values.distance,
      vapour: Physics.vapourDensity(tAir, values.relative_humidity, frame.shared.constants),
      pressure: values.pressure,
      excess: values.atmosphere ?? 0,
      windowTransmittance: values.window_transmittance ?? 1,
      windowReflectance: values.window_reflectance ?? 0,
      tWindow: values.window_temperature ?? NaN,
      tWindowAmbient: values.window_ambient ?? NaN,
    };
  }

  // For each optics, the terms of the measurement equation under these values.
  function termsOf(frame, values) {
    const path = pathOf(frame, values);
    return frame.data.optics_names.map((names) =>
      Physics.terms(values[names.emissivity], values[names.reflected], path, frame.table, frame.shared));
  }

  // A frame seen under assumptions: `at` turns a stored object temperature [K] of one optics into what it would be.
  function under(frame, changes) {
    const stored = sceneOf(frame, {});
    if (!Object.keys(changes).length) return { frame, values: stored, at: (t) => t, isStored: true };
    const values = sceneOf(frame, changes);
    const before = termsOf(frame, stored);
    const after = termsOf(frame, values);
    const at = (t, optics) => Physics.objectTemperature(Physics.apparentTemperature(t, before[optics]), after[optics]);
    return { frame, values, at, isStored: false };
  }

  // The temperatures [K] by optics and index under assumptions.
  function lookUpOf(view) {
    const { frame } = view;
    if (view.isStored) return frame.data.optics_names.map(() => frame.levels);
    return frame.data.optics_names.map((_, optics) => frame.levels.map((t) => view.at(t, optics)));
  }

  function opticsAt(frame, k) {
    return frame.optics ? frame.optics[k] : 0;
  }

  function temperatureAt(frame, x, y) {
    const k = y * frame.data.columns + x;
    return frame.lookUp[opticsAt(frame, k)][frame.index[k]];
  }

  // Film coefficient [W m⁻² K⁻¹] stored for a stored surface temperature [K].
  function filmAt(frame, t) {
    const { low, high, values } = frame.data.around.film;
    if (values.length < 2) return values.length ? values[0] : NaN;
    const place = Math.min(Math.max((t - low) / (high - low), 0), 1) * (values.length - 1);
    const k = Math.min(Math.floor(place), values.length - 2);
    return values[k] + (place - k) * (values[k + 1] - values[k]);
  }

  function aroundOf(view, optics, tStored) {
    const { frame, values } = view;
    const { around } = frame.data;
    return {
      film: filmAt(frame, tStored),
      tAir: values[around.air],
      tRadiant: values[around.radiant],
      emissivity: values[frame.data.optics_names[optics].total],
    };
  }

  function fluxAt(view, x, y) {
    const { frame } = view;
    const k = y * frame.data.columns + x;
    const optics = opticsAt(frame, k);
    const around = aroundOf(view, optics, frame.levels[frame.index[k]]);
    return frame.data.around.sign * Physics.surfaceFlux(temperatureAt(frame, x, y), around, frame.shared.constants);
  }

  function emissivityAt(view, x, y) {
    const { data } = view.frame;
    return view.values[data.optics_names[opticsAt(view.frame, y * data.columns + x)].emissivity];
  }

  // The linear functional number `f` of an area, such as its mean [K].
  function functional(view, parts, f = 0) {
    let sum = 0;
    for (const part of parts) {
      part.t.forEach((t, k) => {
        if (part.w[f][k] !== 0) sum += part.w[f][k] * view.at(t, part.optics);
      });
    }
    return sum;
  }

  // Reference temperature [K] at a place [px]: as reported, plus what its own pixels change by.
  function referenceOf(view) {
    const { reference } = view.frame.data;
    if (!reference) return null;
    const stored = under(view.frame, {});
    const moved = [0, 1, 2].map((f) => (view.isStored ? 0
      : functional(view, reference.parts, f) - functional(stored, reference.parts, f)));
    const [left, top, right, bottom] = reference.box;
    const clip = (value, low, high) => Math.min(Math.max(value, low), high);
    const at = (x, y) => reference.level + moved[0]
      + (reference.slope[0] + moved[1]) * (clip(x, 2 * left - right, 2 * right - left) - reference.centre[0])
      + (reference.slope[1] + moved[2]) * (clip(y, 2 * top - bottom, 2 * bottom - top) - reference.centre[1]);
    return { level: reference.level + moved[0], at };
  }

  // Temperatures [K] over pixels: how many, how many of them not measurable, extremes, mean, mean ΔT to the reference.
  function over(frame, reference, pixels, isLine) {
    const t = pixels.map(([x, y]) => temperatureAt(frame, x, y));
    const measured = t.filter((value) => !Number.isNaN(value));
    const mean = (values) => values.reduce((sum, value) => sum + value, 0) / values.length; // NaN of none
    const level = reference ? pixels.map(([x, y]) => reference.at(x, y)) : null;
    const deltas = level && level.map((one, k) => t[k] - one);
    return {
      pixels: pixels.length,
      missing: pixels.length - measured.length,
      min: measured.reduce((one, other) => Math.min(one, other), measured[0] ?? NaN),
      mean: mean(measured),
      max: measured.reduce((one, other) => Math.max(one, other), measured[0] ?? NaN),
      delta: deltas && mean(deltas.filter((value) => !Number.isNaN(value))),
      ...(isLine ? { along: t, level, length: lengthOf(pixels) } : {}),
    };
  }

  function lengthOf(pixels) {
    const [[x1, y1], [x2, y2]] = [pixels[0], pixels[pixels.length - 1]];
    return Math.hypot(x2 - x1, y2 - y1);
  }

  // What the report is sure of to ± U that is likest a reading: on a surface of the same optics, the nearest in
  // temperature; null where nothing is alike.
  function likest(view, t, optics) {
    const { reference, findings, components } = view.frame.data;
    const zero = view.frame.shared.constants.zero_celsius;
    const stated = [...findings, ...components].filter((item) => item.areas && item.expanded)
      .map((item) => ({ name: item.name, u: item.expanded, t: item.reported.mean_c + zero, parts: item.areas.whole }));
    if (reference?.expanded) {
      stated.push({ name: null, u: reference.expanded, t: reference.level, parts: reference.parts });
    }
    const away = (one) => Math.abs(one.t - t);
    return stated.filter((one) => away(one) <= ALIKE && one.parts.every((part) => part.optics === optics))
      .reduce((best, one) => (best && away(best) <= away(one) ? best : one), null);
  }

  // The coldest and the hottest pixel [x, y]; none where nothing has a temperature.
  function extremes(frame) {
    const { columns } = frame.data;
    const t = (k) => frame.lookUp[opticsAt(frame, k)][frame.index[k]];
    let [coldest, hottest] = [-1, -1];
    for (let k = 0; k < frame.index.length; k += 1) {
      if (Number.isNaN(t(k))) continue;
      if (coldest < 0 || t(k) < t(coldest)) coldest = k;
      if (hottest < 0 || t(k) > t(hottest)) hottest = k;
    }
    return coldest < 0 ? [] : [coldest, hottest].map((k) => [k % columns, Math.floor(k / columns)]);
  }

  // How many pixels have a temperature in the report and none as the frame is looked at now.
  function lost(frame) {
    let count = 0;
    for (let k = 0; k < frame.index.length; k += 1) {
      const now = frame.lookUp[opticsAt(frame, k)][frame.index[k]];
      if (Number.isNaN(now) && !Number.isNaN(frame.levels[frame.index[k]])) count += 1;
    }
    return count;
  }

  return {
    open, under, lookUpOf, temperatureAt, fluxAt, emissivityAt, functional, referenceOf, aroundOf, opticsAt, over,
    extremes, lost, likest,
  };
})();
