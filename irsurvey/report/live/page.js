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

  function markInvalid(input, isInvalid) {
    if (isInvalid) input.setAttribute("aria-invalid", "true");
    else input.removeAttribute("aria-invalid");
  }

  return { shared, say, shown, typeset, el, uniqueId, labelled, markInvalid };
})();
