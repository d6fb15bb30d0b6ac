"use strict";

// The tables of all results: put in order by their headings, narrowed by words and by what the results ask for.
// On paper each is whole and in the order of the report, whatever is chosen here.
const Tables = (() => {
  const { el, labelled, say } = Page;
  const NOTHING = "–";
  const texts = new Intl.Collator(document.documentElement.lang || "en", { numeric: true, sensitivity: "base" });

  // What a cell is sorted by: the number it was written from, else its text; null where it has none.
  function valueOf(cell) {
    const text = plain(cell.textContent);
    const given = cell.dataset.value;
    if (given === undefined) return text && text !== NOTHING ? text : null;
    const number = given === "" ? NaN : Number(given);
    return Number.isFinite(number) ? number : null;
  }

  function plain(text) {
    return text.replace(/\s+/g, " ").trim();
  }

  // Text as it is searched: a typed hyphen finds a minus sign.
  function searched(text) {
    return plain(text).replaceAll("−", "-").toLocaleLowerCase();
  }

  function compared(a, b) {
    return typeof a === "number" && typeof b === "number" ? a - b : texts.compare(String(a), String(b));
  }

  class Table {
    constructor(table) {
      this.body = table.tBodies[0];
      this.heads = [...table.tHead.rows[0].cells];
      this.rows = [...this.body.rows].map((row) => ({
        row,
        text: searched(row.textContent),
        values: [...row.cells].map(valueOf),
      }));
      this.order = null; // or { column, sign }
      this.names = this.heads.map((head) => plain(head.textContent));
      this.heads.forEach((head, column) => {
        const press = () => this.sort(column);
        head.replaceChildren(el("button", { type: "button", class: "live-sort", on: { click: press } }, this.names[column]));
      });
      table.classList.add("live-sorts");
      table.before(this.tools());
      this.show();
      addEventListener("beforeprint", () => this.arrange(null));
      addEventListener("afterprint", () => this.arrange(this.order));
    }

    tools() {
      const show = () => this.show();
      this.words = el("input", { type: "search", autocomplete: "off", spellcheck: "false", on: { input: show } });
      this.which = el("select", { autocomplete: "off", on: { change: show } }, el("option", { value: "" }, say("rows_any")),
        this.choices("urgency"), this.choices("outcome"));
      this.count = el("p", { class: "live-count", "aria-live": "polite" });
      const whole = el("button", { type: "button", on: { click: () => this.reset() } }, say("rows_all"));
      return el("div", { class: "live live-rows", role: "group", "aria-label": say("rows") },
        el("div", { class: "live-bar" }, labelled(say("rows_words"), this.words), labelled(say("rows_which"), this.which), whole),
        this.count);
    }

    // What the rows ask for, or their outcomes, the most urgent first.
    choices(kind) {
      const last = this.heads.length - 1;
      const ranked = [...this.rows].sort((a, b) => b.values[last] - a.values[last]);
      const found = new Set(ranked.map(({ row }) => row.dataset[kind === "urgency" ? "asks" : "outcome"]));
      const options = [...found].map((name) => el("option", { value: `${kind}:${name}` }, name));
      return el("optgroup", { label: say(`rows_${kind}`) }, ...options);
    }

    sort(column) {
      const isRising = this.order?.column === column && this.order.sign > 0;
      this.order = { column, sign: isRising ? -1 : 1 };
      this.show();
    }

    reset() {
      this.order = null;
      this.words.value = "";
      this.which.value = "";
      this.show();
    }

    show() {
      this.arrange(this.order);
      this.heads.forEach((head, column) => {
        if (this.order?.column !== column) head.removeAttribute("aria-sort");
        else head.setAttribute("aria-sort", this.order.sign > 0 ? "ascending" : "descending");
      });
      const words = searched(this.words.value).split(" ");
      const kept = this.rows.filter((entry) => {
        const isKept = this.isChosen(entry.row) && words.every((word) => entry.text.includes(word));
        entry.row.classList.toggle("live-left-out", !isKept);
        return isKept;
      });
      this.count.textContent = this.told(kept.length);
    }

    isChosen({ dataset }) {
      const chosen = this.which.value;
      return !chosen || chosen === `urgency:${dataset.asks}` || chosen === `outcome:${dataset.outcome}`;
    }

    // How many rows are seen, and in which order.
    told(count) {
      const all = this.rows.length;
      if (!this.order) return say("rows_shown", { count, all });
      const { column, sign } = this.order;
      return say(sign > 0 ? "rows_rising" : "rows_falling", { count, all, column: this.names[column] });
    }

    // Rows without a value come last both ways; equal ones stay in the order of the report.
    arrange(order) {
      const inOrder = order ? [...this.rows].sort((one, other) => {
        const [a, b] = [one.values[order.column], other.values[order.column]];
        if (a === null || b === null) return (a === null) - (b === null);
        return order.sign * compared(a, b);
      }) : this.rows;
      this.body.append(...inOrder.map(({ row }) => row));
    }
  }

  return [...document.querySelectorAll("table[data-sortable]")].map((table) => new Table(table));
})();
