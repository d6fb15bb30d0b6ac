"use strict";

// The panel of assumptions of one frame: fields for them, and a table of what would follow.
const Panels = (() => {
  const { say, shown, typeset, el, labelled, markInvalid } = Page;

  class Panel {
    // `onChange` is called when an assumption was changed to something it can be.
    constructor(data, onChange) {
      this.changes = {}; // by name in the scene, in SI units
      this.onChange = onChange;
      this.fields = data.assumptions.map((assumption) => {
        const text = String(Number(assumption.value.toPrecision(6)));
        const input = el("input", { type: "number", step: "any", value: text, on: { input: () => this.assume() } });
        const reported = el("span", { class: "live-reported" }, say("reported", { value: assumption.reported }));
        const field = labelled(assumption.label, input, el("span", {}, assumption.unit), reported);
        return { assumption, input, text, field };
      });
      this.faults = el("p", { class: "live-faults", role: "alert" });
      this.banner = el("p", { class: "live-banner", hidden: true });
      this.table = el("div", { class: "live-table" });
      this.node = el("details", { class: "live-assumptions" },
        el("summary", {}, say("assumptions")),
        el("p", {}, say("assumptions_about")),
        el("div", { class: "live-fields" }, ...this.fields.map(({ field }) => field)),
        this.faults, this.banner, this.table);
    }

    assume() {
      this.changes = {};
      const faults = [];
      for (const { assumption, input, text } of this.fields) {
        const isEmpty = input.value === "" && !input.validity.badInput;
        const isGood = isEmpty || isPossible(assumption, input);
        markInvalid(input, !isGood);
        if (!isGood) faults.push(faultOf(assumption));
        else if (!isEmpty && Number(input.value) !== Number(text)) {
          this.changes[assumption.name] = (Number(input.value) - assumption.shift) / assumption.factor;
        }
      }
      this.faults.textContent = faults.join("; ");
      this.onChange();
    }

    reset() {
      this.changes = {};
      this.faults.textContent = "";
      this.fields.forEach(({ input, text }) => {
        input.value = text;
        markInvalid(input, false);
      });
    }

    // Say what follows under a view; `lost` pixels have no temperature under it that have one in the report.
    tell(view, reference, lost) {
      this.banner.hidden = view.isStored;
      this.banner.textContent = view.isStored ? "" : [
        say("what_if_about", { changes: this.changesInWords() }),
        say("clears_nothing"),
        lost ? say("unsolved", { pixels: lost }) : "",
      ].join(" ").trim();
      this.table.replaceChildren(tableOf(view, reference));
    }

    changesInWords() {
      const changed = this.fields.filter(({ assumption }) => assumption.name in this.changes);
      return changed.map(({ assumption: { label, unit }, input, text }) => {
        const [now, old] = [input.value, text].map((value) => `${typeset(value)} ${unit}`.trim());
        return say("change", { label, new: now, old });
      }).join("; ");
    }
  }

  function isPossible({ name, low, high }, input) {
    const value = Number(input.value);
    if (input.validity.badInput || (low !== null && value < low) || (high !== null && value > high)) return false;
    return !(name.startsWith("emissivity") && value === 0);
  }

  function faultOf({ label, low, high }) {
    const key = low === null ? "not_a_number" : high === null ? "not_a_value_above" : "not_a_value";
    const [least, most] = [low, high].map((end) => (end === null ? "" : typeset(String(Number(end.toPrecision(6))))));
    return say(key, { label, low: least, high: most });
  }

  function tableOf(view, reference) {
    const rows = Assumptions.consequences(view).map((row) => rowOf(view, row));
    if (!rows.length && !reference) return el("p", {}, say("nothing_found"));
    if (reference) rows.push(referenceRow(view, reference));
    const head = ["result", "temperature", "judged", "class"].map((key) => el("th", { scope: "col" }, say(key)));
    return el("table", {},
      el("caption", {}, say("table")), el("thead", {}, el("tr", {}, ...head)), el("tbody", {}, ...rows));
  }

  function rowOf(view, row) {
    const { item, numbers, isWorkedOut } = row;
    const isFinding = item.kind === "finding";
    const mark = el("span", { class: isFinding ? "mark" : "mark dark" }, item.mark);
    const head = el("th", { scope: "row" }, mark, " ", el("bdi", {}, item.name));
    if (!isWorkedOut) return el("tr", { "data-item": item.id }, head, el("td", { colspan: "3" }, say("as_reported")));
    const temperature = isFinding ? "mean_c" : "max_c";
    const celsius = (value) => shown("temperature", value === null ? null : value + Page.shared.constants.zero_celsius);
    const { key, label, show } = item.by;
    const other = row.by.key === key ? "" : `${row.by.label} `;
    const now = row.by.key in numbers && numbers[row.by.key] === undefined ? say("unknown")
      : `${other}${shown(row.by.show, numbers[row.by.key] ?? null)}`;
    return el("tr", { "data-item": item.id }, head,
      cell(view, "temperature", celsius(item.reported[temperature]), celsius(numbers[temperature])),
      cell(view, "judged", shown(show, item.reported[key] ?? null), now, { name: label }),
      cell(view, "class", item.class ?? say("no_class"), classOf(row), { isMarked: isClassChanged(row) }));
  }

  function classOf({ class: name, reflective, isUnknown }) {
    if (isUnknown) return say("unknown");
    return name ?? say(reflective ? "too_reflective" : "no_class");
  }

  function isClassChanged({ item, class: name, urgency, isUnknown }) {
    return !isUnknown && (name !== item.class || urgency !== item.urgency);
  }

  function referenceRow(view, reference) {
    const levels = [view.frame.data.reference.level, reference.level].map((level) => shown("temperature", level));
    return el("tr", { "data-item": "reference" }, el("th", { scope: "row" }, say("reference_level")),
      cell(view, "temperature", ...levels), el("td", {}), el("td", {}));
  }

  function cell(view, key, before, after, { name = "", isMarked = false } = {}) {
    const told = name ? [el("span", { class: "live-name" }, name)] : [];
    told.push(el("span", { class: "live-before" }, `${say("in_report")} `, el("b", {}, before)));
    if (!view.isStored) {
      const now = el("span", { class: "live-after" }, `${say("what_if").toLowerCase()} `, el("b", {}, after));
      if (isMarked) now.append(" ", el("em", {}, say("changed")));
      told.push(now);
    }
    const marked = isMarked && !view.isStored ? "live-changed" : null;
    return el("td", { "data-label": say(key), "data-column": key, class: marked }, ...told);
  }

  return { Panel };
})();
