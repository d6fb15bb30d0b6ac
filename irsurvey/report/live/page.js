"use strict";

// Small pieces that all parts of the page share: what came with it, words, numbers as people read them, elements.
const Page = (() => {
  const shared = {}; // what live-tables holds
  let serial = 0;

  function say(key, values = {}) {
    return shared.words[key].replace(/\{(\w+)\}/g, (_, name) => values[name]);
  }

  // A number in SI units as it is shown: `kind` is one of shared.show.
  function shown(kind, value, places) {
    if (value === null || Number.isNaN(value)) return "–";
    const { factor, shift, symbol, places: usual } = shared.show[kind];
    const number = (value * factor + shift).toFixed(places ?? usual).replace(/^-(0(?:\.0+)?)$/, "$1");
    const signed = kind === "delta" && Number(number) > 0 ? `+${number}` : number;
    return symbol ? `${typeset(signed)}\u00a0${symbol}` : typeset(signed);
  }

  // A number as people read it, to at most so many significant digits.
  function rounded(kind, value, digits) {
    const { factor, shift, places } = shared.show[kind];
    const number = Number((value * factor + shift).toPrecision(digits));
    const needed = number === 0 ? 0 : digits - 1 - Math.floor(Math.log10(Math.abs(number)));
    return shown(kind, (number - shift) / factor, Math.min(Math.max(needed, 0), places));
  }

  function typeset(number) {
    return number.replace("-", "−").replace(".", shared.show.decimal);
  }

  // An element with attributes (true: present; false, null: absent), handlers under `on`, and what stands in it.
  function el(tag, attributes = {}, ...children) {
    const node = document.createElement(tag);
    for (const [name, value] of Object.entries(attributes)) {
      if (name === "on") Object.entries(value).forEach(([event, act]) => node.addEventListener(event, act));
      else if (value === true) node.setAttribute(name, "");
      else if (value !== false && value !== null) node.setAttribute(name, value);
    }
    node.append(...children);
    return node;
  }

  function uniqueId() {
    serial += 1;
    return `live-${serial}`;
  }

  function labelled(text, input, ...behind) {
    input.id = uniqueId();
    return el("div", { class: "live-field" }, el("label", { for: input.id }, text), input, ...behind);
  }

  // What was typed as a number: a point and a comma are both understood; NaN where it is none.
  function numberOf(text) {
    const plain = text.trim().replace("−", "-").replace(",", ".");
    return /^[-+]?(\d+\.?\d*|\.\d+)$/.test(plain) ? Number(plain) : NaN;
  }

  // A number as it stands in a field: with the survey's decimal mark, and a minus as keyboards have it.
  function written(number) {
    return String(number).replace(".", shared.show.decimal);
  }

  // A field for a number, of text so that it can show the survey's decimal mark; the arrow keys step.
  function numberField(value, step, change) {
    const input = el("input", { type: "text", inputmode: "decimal", autocomplete: "off", value, on: { input: change } });
    input.addEventListener("keydown", (event) => {
      const sign = { ArrowUp: 1, ArrowDown: -1 }[event.key];
      const now = numberOf(input.value);
      if (!sign || Number.isNaN(now)) return;
      event.preventDefault();
      input.value = written(Number((now + sign * step).toFixed(6)));
      change();
    });
    return input;
  }

  function markInvalid(input, isInvalid) {
    if (isInvalid) input.setAttribute("aria-invalid", "true");
    else input.removeAttribute("aria-invalid");
  }

  return {
    shared, say, shown, rounded, typeset, el, uniqueId, labelled, numberOf, written, numberField, markInvalid,
  };
})();
