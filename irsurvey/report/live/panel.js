"use strict";

// The panel of assumptions of one frame: fields for them, and a table of what would follow.
const Panels = (() => {
  const { say, shown, typeset, el, labelled, numberField, numberOf, written, markInvalid } = Page;
  const OWN = ["emissivity", "reflected"]; // what a part can have of its own

  class Panel {
    // `onChange` is called when an assumption was changed to something it can be.
    constructor(data, onChange) {
      this.changes = {}; // by name in the scene, in SI units
      this.onChange = onChange;
      this.fields = data.assumptions.map((assumption) => {
        const text = written(Number(assumption.value.toPrecision(6)));
        const isShare = assumption.low === 0 && assumption.high === 1;
        const input = numberField(text, isShare ? 0.01 : 1, () => this.assume());
        const reported = el("span", { class: "live-reported" }, say("reported", { value: assumption.reported }));
        const field = labelled(assumption.label, input, el("span", {}, assumption.unit), reported);
        return { assumption, input, text, field };
      });
      this.faults = el("p", { class: "live-faults", role: "alert" });
      this.banner = el("p", { class: "live-banner", hidden: true });
      this.kept = el("p", { hidden: true }, say("stays"));
      this.table = el("div", { class: "live-table" });
      this.node = el("details", { class: "live-assumptions" },
        el("summary", {}, say("assumptions")),
        el("p", {}, say("assumptions_about")),
        el("div", { class: "live-fields" }, ...this.fields.map(({ field }) => field)),
        this.faults, this.banner, this.kept, this.table);
    }

    assume() {
      this.changes = {};
      const faults = [];
      for (const { assumption, input, text } of this.fields) {
        const isEmpty = input.value.trim() === "";
        const isGood = isEmpty || isPossible(assumption, input);
        markInvalid(input, !isGood);
        if (!isGood) faults.push(faultOf(assumption));
        else if (!isEmpty && numberOf(input.value) !== numberOf(text)) {
          this.changes[assumption.name] = (numberOf(input.value) - assumption.shift) / assumption.factor;
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
      this.kept.hidden = view.isStored;
      this.banner.textContent = view.isStored ? "" : [
        say("what_if_about", { changes: this.changesInWords() }),
        say("clears_nothing"),
        lost ? say("unsolved", { pixels: lost }) : "",
      ].join(" ").trim();
      this.table.replaceChildren(tableOf(view, reference, this.changes));
    }

    changesInWords() {
      const changed = this.fields.filter(({ assumption }) => assumption.name in this.changes);
      return changed.map(({ assumption: { label, unit }, input, text }) => {
        const [now, old] = [input.value, text].map((value) => `${typeset(String(numberOf(value)))} ${unit}`.trim());
        return say("change", { label, new: now, old });
      }).join("; ");
    }
  }

  function isPossible({ name, low, high }, input) {
    const value = numberOf(input.value);
    if (Number.isNaN(value) || (low !== null && value < low) || (high !== null && value > high)) return false;
    return !(name.startsWith("emissivity") && value === 0);
  }

  function faultOf({ label, low, high }) {
    const key = low === null ? "not_a_number" : high === null ? "not_a_value_above" : "not_a_value";
    const [least, most] = [low, high].map((end) => (end === null ? "" : typeset(String(Number(end.toPrecision(6))))));
    return say(key, { label, low: least, high: most });
  }

  function tableOf(view, reference, changes) {
    const rows = Assumptions.consequences(view).map((row) => rowOf(view, row, changes));
    if (!rows.length && !reference) return el("p", {}, say("nothing_found"));
    if (reference) rows.push(referenceRow(view, reference, changes));
    const head = ["result", "temperature", "judged", "class"].map((key) => el("th", { scope: "col" }, say(key)));
    return el("table", {},
      el("caption", {}, say("table")), el("thead", {}, el("tr", {}, ...head)), el("tbody", {}, ...rows));
  }

  function rowOf(view, row, changes) {
    const { item, numbers, isWorkedOut } = row;
    const isFinding = item.kind === "finding";
    const mark = el("span", { class: isFinding ? "mark" : "mark dark" }, item.mark);
    const head = el("th", { scope: "row" }, mark, " ", el("bdi", {}, item.name));
    const isSame = Object.entries(numbers).every(([key, value]) => isAsReported(value, item.reported[key]));
    if (isWorkedOut && isSame) head.append(...whyUnchanged(view, item.areas.whole, changes));
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
      cell(view, "class", item.class ?? say("no_class"), classOf(row), {
        isMarked: isClassChanged(row),
        chips: [chipOf(item, item.urgency), row.isUnknown ? "" : chipOf(item, row.urgency)],
      }));
  }

  function isAsReported(value, reported) {
    return value === reported || Math.abs(value - reported) < 1e-9;
  }

  // Why nothing changed of what has its own value of what was changed; nothing where that is not the reason.
  function whyUnchanged(view, parts, changes) {
    const { optics_names: names, follows } = view.frame.data;
    const hasOwn = (part, base) => names[part.optics][base] !== base && follows[names[part.optics][base]] !== base;
    const owned = OWN.filter((base) => base in changes && parts.every((part) => hasOwn(part, base)));
    return owned.map((base) => el("span", { class: "live-own" }, say(`own_${base}`)));
  }

  // What an urgency asks for, as the report says it.  Where it asks for nothing and the report has not cleared the
  // result, a what-if does not either: then it is to look again.
  function chipOf(item, urgency) {
    const key = urgency === 0 && !item.cleared ? "open" : urgency ?? "none";
    const kind = { open: "weak", none: "ux" }[key] ?? `u${urgency}`;
    return el("span", { class: `chip ${kind}` }, Page.shared.urgencies[key]);
  }

  function classOf({ class: name, reflective, isUnknown }) {
    if (isUnknown) return say("unknown");
    return name ?? say(reflective ? "too_reflective" : "no_class");
  }

  function isClassChanged({ item, class: name, urgency, isUnknown }) {
    return !isUnknown && (name !== item.class || urgency !== item.urgency);
  }

  function referenceRow(view, reference, changes) {
    const { level, parts } = view.frame.data.reference;
    const levels = [level, reference.level].map((one) => shown("temperature", one));
    const why = isAsReported(reference.level, level) ? whyUnchanged(view, parts, changes) : [];
    return el("tr", { "data-item": "reference" }, el("th", { scope: "row" }, say("reference_level"), ...why),
      cell(view, "temperature", ...levels), el("td", {}), el("td", {}));
  }

  function cell(view, key, before, after, { name = "", isMarked = false, chips = ["", ""] } = {}) {
    const told = name ? [el("span", { class: "live-name" }, name)] : [];
    told.push(el("span", { class: "live-before" }, `${say("in_report")} `, el("b", {}, before), " ", chips[0]));
    if (!view.isStored) {
      const now = el("span", { class: "live-after" }, `${say("what_if").toLowerCase()} `, el("b", {}, after), " ", chips[1]);
      if (isMarked) now.append(" ", el("em", {}, say("changed")));
      told.push(now);
    }
    const marked = isMarked && !view.isStored ? "live-changed" : null;
    return el("td", { "data-label": say(key), "data-column": key, class: marked }, ...told);
  }

  return { Panel };
})();
