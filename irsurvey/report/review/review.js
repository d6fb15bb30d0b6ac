"use strict";

// The reviewer's desk: a form for each result, kept in this browser while one works, exported as one file.
// Texts of people only ever become the text or the value of an element.  Page is that of the page's tools.
(() => {
  const { el } = Page;
  const CHOICES = [["", "keep"], ["accepted", "accept"], ["rejected", "reject"], ["reclassified", "reclassify"], ["open", "reopen"]];
  const COUNTED = ["open", "accepted", "rejected", "reclassified"];
  const EXPLAINED = ["rejected", "reclassified"]; // decisions that need a reason
  let data;

  function say(key, values = {}) {
    return data.words[key].replace(/\{(\w+)\}/g, (_, name) => values[name]);
  }

  function labelled(text, input) {
    input.id = Page.uniqueId();
    return el("div", { class: "review-field" }, el("label", { for: input.id }, text), input);
  }

  // What is kept under the report's identity: who reviews, and a decision for each key.  A file:// page of some browsers
  // has nowhere to keep it; then it lasts as long as the page does.
  class Store {
    constructor(identity) {
      this.prefix = `irsurvey-review/${identity}/`;
      this.kept = new Map();
      this.lasts = true;
      try {
        for (let k = 0; k < localStorage.length; k += 1) {
          const name = localStorage.key(k);
          if (name.startsWith(this.prefix)) this.kept.set(name.slice(this.prefix.length), this.parsed(localStorage.getItem(name)));
        }
        localStorage.setItem(`${this.prefix}?`, "");
        localStorage.removeItem(`${this.prefix}?`);
      } catch {
        this.lasts = false;
      }
    }

    parsed(text) {
      try {
        return JSON.parse(text);
      } catch {
        return null;
      }
    }

    get(name) {
      return this.kept.get(name) ?? null;
    }

    set(name, value) {
      if (value === null) this.kept.delete(name);
      else this.kept.set(name, value);
      try {
        if (value === null) localStorage.removeItem(this.prefix + name);
        else localStorage.setItem(this.prefix + name, JSON.stringify(value));
      } catch {
        this.lasts = false;
      }
    }

    decisions() {
      const names = [...this.kept.keys()].filter((name) => name.startsWith("key/"));
      return new Map(names.map((name) => [name.slice(4), sound(this.kept.get(name))]).filter(([, kept]) => kept !== null));
    }
  }

  // A kept decision as this page would have written it, or null: other pages can write to the same place.
  function sound(kept) {
    if (kept === null || typeof kept !== "object" || Array.isArray(kept)) return null;
    const isText = ["id", "frame", "decision", "comment"].every((name) => typeof kept[name] === "string");
    const isKnown = CHOICES.some(([decision]) => decision === kept.decision);
    return isText && isKnown && kept.on !== null && typeof kept.on === "object" ? kept : null;
  }

  function todayHere() {
    const now = new Date();
    return [now.getFullYear(), now.getMonth() + 1, now.getDate()].map((part) => String(part).padStart(2, "0")).join("-");
  }

  class Desk {
    constructor(mount, section) {
      this.store = new Store(data.report);
      this.results = new Map(data.results.map((result) => [result.key, result]));
      this.forms = new Map();
      this.who = Object.assign({ reviewer: "", date: todayHere(), working: false }, this.store.get("who"));
      this.mount(mount);
      this.forgetApplied();
      const byPlace = new Map(data.results.map((result) => [String(result.place), result]));
      document.querySelectorAll(".review[data-review]").forEach((place) => {
        const result = byPlace.get(place.dataset.review);
        if (result && !this.forms.has(result.key)) this.forms.set(result.key, new Form(this, result, place));
      });
      section.hidden = false;
      this.ofForms.hidden = this.forms.size === 0; // a page of a report of many that shows no results
      this.work(this.who.working === true || this.store.decisions().size > 0);
      this.update();
    }

    // Decisions that have come back as part of the report need not be kept, nor exported again.
    forgetApplied() {
      const applied = new Set();
      for (const review of data.said.filter((one) => one.report === data.report && one.reviewer === this.reviewer.value.trim())) {
        for (const [key, ...rest] of review.decisions) applied.add(JSON.stringify([key, ...rest]));
      }
      for (const [key, kept] of this.store.decisions()) {
        const { criterion, class: class_, urgency } = newClass(kept);
        const level = class_ === null ? urgency : this.urgencyOf(criterion, class_);
        const same = [key, exported(kept), criterion, class_, level, kept.comment];
        if (applied.has(JSON.stringify(same))) this.store.set(`key/${key}`, null);
      }
    }

    urgencyOf(criterion, class_) {
      const found = (data.criteria[criterion] ?? []).find(([name]) => name === class_);
      return found ? found[1] : null;
    }

    mount(place) {
      this.toggle = el("button", { type: "button", "aria-expanded": "false", on: { click: () => this.work(!this.who.working) } });
      this.reviewer = el("input", { type: "text", dir: "auto", autocomplete: "name", maxlength: data.longest, on: { input: () => this.keepWho() } });
      this.date = el("input", { type: "date", on: { input: () => this.keepWho() } });
      this.reviewer.value = typeof this.who.reviewer === "string" ? this.who.reviewer : "";
      this.date.value = typeof this.who.date === "string" ? this.who.date : todayHere();
      this.onlyOpen = el("input", { type: "checkbox", on: { change: () => this.filter() } });
      this.counted = el("p", { class: "review-counts" });
      this.tally = el("p", { class: "review-tally" });
      this.message = el("p", { class: "review-message", role: "status" });
      this.ofForms = el("div", { class: "review-field review-steps" }, labelled(say("only_open"), this.onlyOpen), el("button", { type: "button", on: { click: () => this.next() } }, say("go")));
      this.bar = el(
        "div",
        { class: "review-bar", role: "group", "aria-label": say("review") },
        this.counted,
        this.ofForms,
        el("button", { type: "button", class: "review-main", on: { click: () => this.export() } }, say("export")),
        this.message,
      );
      this.note = el("p", { class: "review-note" }, say("about"));
      this.signed = el("div", { class: "review-who" }, labelled(say("reviewer"), this.reviewer), labelled(say("date"), this.date), this.tally);
      place.append(this.toggle, this.note, this.signed);
      place.closest("#review").after(this.bar);
    }

    work(isOn) {
      this.who.working = isOn;
      document.documentElement.classList.toggle("reviewing", isOn);
      this.toggle.textContent = say(isOn ? "end" : "begin");
      this.toggle.setAttribute("aria-expanded", String(isOn));
      for (const node of [this.bar, this.note, this.signed]) node.hidden = !isOn;
      this.keepWho();
      this.filter();
    }

    keepWho() {
      this.who = { reviewer: this.reviewer.value, date: this.date.value, working: this.who.working };
      this.store.set("who", this.who);
      this.warn();
    }

    warn() {
      const told = [say("about"), this.store.lasts ? "" : say("memory"), this.then ?? ""];
      this.note.textContent = told.filter(Boolean).join(" ");
    }

    // Where a result stands: what is decided here, else what the report says.
    status(result) {
      const kept = sound(this.store.get(`key/${result.key}`));
      if (kept && COUNTED.includes(kept.decision) && !lacksClass(kept)) return kept.decision;
      return result.status;
    }

    isOpen(result) {
      return ["open", "asked again"].includes(this.status(result));
    }

    update() {
      const found = { open: 0, accepted: 0, rejected: 0, reclassified: 0 };
      for (const result of this.results.values()) found[this.isOpen(result) ? "open" : this.status(result)] += 1;
      const elsewhere = [...this.store.decisions().keys()].filter((key) => !this.results.has(key)).length;
      for (const node of [this.counted, this.tally]) {
        const parts = COUNTED.map((status) => el("span", { "data-count": status }, el("b", {}, String(found[status])), ` ${say(status)}`));
        if (elsewhere) parts.push(el("span", {}, say("elsewhere", { count: elsewhere })));
        node.replaceChildren(...parts);
      }
      this.warn();
    }

    filter() {
      const hides = this.who.working && this.onlyOpen.checked;
      for (const form of this.forms.values()) {
        const isHere = form.section.contains(document.activeElement);
        form.section.classList.toggle("review-hidden", hides && !this.isOpen(form.result) && !isHere);
      }
    }

    next() {
      this.filter();
      const open = [...this.forms.values()].filter((form) => this.isOpen(form.result));
      if (!open.length) {
        this.message.textContent = say("all_decided");
        return;
      }
      const after = open.findIndex((form) => form.result.key === this.last);
      const form = open[(after + 1) % open.length];
      this.last = form.result.key;
      form.focus();
    }

    export() {
      const complaint = this.complaint();
      if (complaint) {
        this.message.textContent = complaint[0];
        complaint[1]?.focus();
        return;
      }
      const decisions = this.ordered().map(([key, kept]) => ({
        key,
        id: kept.id,
        frame: kept.frame,
        decision: exported(kept),
        ...newClass(kept),
        comment: kept.comment,
        on: kept.on,
      }));
      const content = {
        format: data.format,
        tool: data.tool,
        survey: data.survey,
        report: data.report,
        reviewer: this.reviewer.value.trim(),
        date: this.date.value,
        decisions,
      };
      const file = `decisions-${this.date.value}.json`;
      const blob = new Blob([`${JSON.stringify(content, null, 1)}\n`], { type: "application/json" });
      const link = el("a", { href: URL.createObjectURL(blob), download: file });
      link.click();
      setTimeout(() => URL.revokeObjectURL(link.href), 60000);
      const bare = decisions.filter(lacksReason).length;
      const told = [say("exported", { count: decisions.length, file }), bare ? say(bare === 1 ? "bare_one" : "bare", { count: bare }) : ""];
      this.then = say("then", { file });
      this.message.replaceChildren(told.filter(Boolean).join(" "), el("span", { class: "review-next" }, ` ${this.then}`));
      this.warn();
    }

    // What keeps the decisions from being exported, in words, and the field that would mend it.
    complaint() {
      if (!this.reviewer.value.trim()) return [say("no_name"), this.reviewer];
      if (!this.date.value) return [say("no_date"), this.date];
      const decisions = this.ordered();
      if (!decisions.length) return [say("nothing"), null];
      const lacking = decisions.find(([, kept]) => lacksClass(kept));
      if (lacking) return [say("no_class", { name: lacking[1].id }), this.forms.get(lacking[0])?.select];
      return null;
    }

    // Decisions in the order of the page, then those of other pages by their keys.
    ordered() {
      const kept = this.store.decisions();
      const others = [...kept.keys()].filter((key) => !this.results.has(key)).sort();
      return [...this.results.keys(), ...others].filter((key) => kept.has(key)).map((key) => [key, kept.get(key)]);
    }
  }

  function lacksClass(kept) {
    const { class: class_, urgency } = newClass(kept);
    return kept.decision === "reclassified" && class_ === null && urgency === null;
  }

  function lacksReason({ decision, comment }) {
    return EXPLAINED.includes(decision) && !comment.trim();
  }

  function exported(kept) {
    return kept.decision || "commented";
  }

  // What a reclassified result is given: a class of a criterion, or an urgency.
  function newClass(kept) {
    const none = { criterion: null, class: null, urgency: null };
    if (kept.decision !== "reclassified") return none;
    if (typeof kept.class === "string" && typeof kept.criterion === "string") return { ...none, criterion: kept.criterion, class: kept.class };
    return Number.isInteger(kept.urgency) ? { ...none, urgency: kept.urgency } : none;
  }

  class Form {
    constructor(desk, result, place) {
      this.desk = desk;
      this.result = result;
      this.section = place.closest(".review-one, .result") ?? place;
      const kept = sound(desk.store.get(`key/${result.key}`));
      const group = Page.uniqueId();
      const choices = CHOICES.filter(([decision]) => decision !== "open" || result.decided);
      this.radios = choices.map(([decision]) => el("input", { type: "radio", name: group, value: decision, on: { change: () => this.keep() } }));
      this.select = this.classes();
      this.select.addEventListener("change", () => this.keep());
      this.given = labelled(say("new_class", { name: result.id }), this.select);
      this.comment = el("textarea", { rows: 2, dir: "auto", maxlength: data.longest, on: { input: () => this.keep() } });
      this.why = el("p", { class: "review-why", role: "status" });
      this.mine = el("p", { class: "review-mine", dir: "auto" });
      this.node = el(
        "fieldset",
        { class: "review-form" },
        el("legend", {}, say("decision", { name: result.id })),
        el("div", { class: "review-choices" }, ...choices.map(([, word], k) => el("label", {}, this.radios[k], ` ${say(word)}`))),
        this.given,
        labelled(say("comment"), this.comment),
        this.why,
      );
      this.node.addEventListener("focusout", (event) => {
        if (!this.node.contains(event.relatedTarget)) setTimeout(() => desk.filter());
      });
      this.radios.forEach((radio) => (radio.checked = radio.value === (kept?.decision ?? "")));
      if (!this.radios.some((radio) => radio.checked)) this.radios[0].checked = true;
      this.select.selectedIndex = Math.max(0, this.options.findIndex((option) => kept && isSame(option, newClass(kept))));
      this.comment.value = kept?.comment ?? "";
      place.append(this.node, this.mine);
      this.show();
    }

    // Every class of the criteria that judge the result, then the urgencies; the first option is none of them.
    classes() {
      this.options = [null];
      const select = el("select", {}, el("option", { value: "0" }, say("choose")));
      const add = (group, option, text) => {
        group.append(el("option", { value: String(this.options.length) }, text));
        this.options.push(option);
      };
      for (const criterion of this.result.criteria) {
        if (!data.criteria[criterion]) continue;
        const group = el("optgroup", { label: criterion });
        for (const [name, urgency] of data.criteria[criterion]) {
          add(group, { criterion, class: name, urgency: null }, `${name} (${data.urgencies[urgency]})`);
        }
        select.append(group);
      }
      const group = el("optgroup", { label: say("urgency") });
      for (const [urgency, text] of Object.entries(data.urgencies)) {
        add(group, { criterion: null, class: null, urgency: Number(urgency) }, say("urgency_of", { urgency, words: text }));
      }
      select.append(group);
      return select;
    }

    get decision() {
      return this.radios.find((radio) => radio.checked).value;
    }

    keep() {
      const { id, frame, on, key } = this.result;
      const decision = this.decision;
      const given = decision === "reclassified" ? this.options[this.select.selectedIndex] : null;
      const comment = this.comment.value;
      const isNothing = decision === "" && !comment.trim();
      const none = { criterion: null, class: null, urgency: null };
      this.desk.store.set(`key/${key}`, isNothing ? null : { id, frame, decision, ...(given ?? none), comment, on });
      this.show();
      this.desk.update();
    }

    // What is hidden, and what paper shows in place of the form.
    show() {
      const kept = sound(this.desk.store.get(`key/${this.result.key}`));
      this.given.hidden = this.decision !== "reclassified";
      const why = kept && lacksReason(kept) ? say("why") : "";
      if (this.why.textContent !== why) this.why.textContent = why; // said once, not at every letter
      this.mine.textContent = "";
      if (!kept) return;
      const option = this.options[this.select.selectedIndex];
      const name = this.given.hidden || !option ? "" : `: ${this.select.selectedOptions[0].textContent}`;
      const decided = say(kept.decision === "" ? "by_commented" : kept.decision);
      this.mine.textContent = say("mine", { decision: `${decided}${name}` }) + (kept.comment.trim() ? `. ${say("said", { comment: kept.comment })}` : "");
    }

    focus() {
      const folded = this.node.closest("details");
      if (folded) folded.open = true;
      this.radios.find((radio) => radio.checked).focus();
      this.section.scrollIntoView({ block: "nearest" });
    }
  }

  function isSame(option, given) {
    return option !== null && option.criterion === given.criterion && option.class === given.class && option.urgency === given.urgency;
  }

  function start() {
    const source = document.getElementById("review-data");
    const mount = document.getElementById("review-desk");
    if (!source || !mount) return;
    data = JSON.parse(source.textContent);
    if (data.results.length) new Desk(mount, mount.closest("#review"));
  }

  // Not before the page has loaded.  Chromium (156) gives a file:// page that touches localStorage while it loads a store
  // of its own now and then (about 1 load in 15), so that decisions were gone when the page was opened again.
  if (document.readyState === "complete") start();
  else addEventListener("load", () => setTimeout(start));
})();
