"use strict";

// What other assumptions would do to the findings and components of a frame: their numbers, and their classes by the
// criteria of the report.  Every number is the reported one plus the change of what is worked out here.
const Assumptions = (() => {
  // Numbers of one item by key, in the units the keys end in, worked out under one view; undefined: not worked out.
  function numbersOf(view, item, items, reference) {
    const { areas } = item;
    if (!areas) return {};
    return item.kind === "finding" ? ofFinding(view, areas, reference) : ofComponent(view, item, items);
  }

  function ofFinding(view, areas, reference) {
    const extreme = Frames.functional(view, areas.spot);
    const mean = Frames.functional(view, areas.whole);
    const numbers = { extreme_c: extreme, mean_c: mean };
    if (reference) {
      numbers.delta_k = extreme - reference.at(...areas.spot_at);
      numbers.mean_delta_k = mean - reference.at(...areas.whole_at);
    }
    const { indoor_air: indoor, outdoor_air: outdoor } = view.values;
    if (indoor > outdoor) {
      const [part] = areas.spot;
      const factor = (extreme - outdoor) / (indoor - outdoor);
      const around = Frames.aroundOf(view, part.optics, part.t[0]);
      numbers.temperature_factor = factor;
      numbers.temperature_factor_at_0_25 = Physics.factorAtLimit(extreme, factor, around, view.frame.shared.constants);
    }
    return numbers;
  }

  function ofComponent(view, item, items) {
    const t = Frames.functional(view, item.areas.spot);
    const ambient = view.values.ambient ?? view.values.air;
    const numbers = { max_c: t, mean_c: Frames.functional(view, item.areas.whole), delta_ambient_k: t - ambient };
    const twin = item.twin === null ? null : items[item.twin];
    if (twin && twin.areas) {
      const tTwin = Frames.functional(view, twin.areas.spot);
      numbers.delta_similar_k = t - tTwin + (1 - item.load_factor) * Math.max(tTwin - ambient, 0);
      numbers.relative_difference_percent = t > ambient ? 100 * numbers.delta_similar_k / (t - ambient) : NaN;
    }
    if (item.calm_factor !== null) {
      for (const key of ["delta_similar", "delta_ambient"]) {
        numbers[`${key}_in_calm_k`] = item.calm_factor * numbers[`${key}_k`];
      }
    }
    if (item.limit !== null) numbers.above_limit_k = t - item.limit;
    numbers.above_allowed_k = numbers.delta_ambient_in_calm_k ?? numbers.delta_ambient_k;
    const near = item.neighbours.map((place) => items[place]);
    if (near.length && near.every((one) => one.areas)) {
      const others = near.map((one) => Frames.functional(view, one.areas.spot));
      const over = t - median(others);
      numbers.delta_neighbours_k = over > 0 ? item.sun_factor * over : over;
    }
    return numbers;
  }

  function median(values) {
    const sorted = [...values].sort((a, b) => a - b);
    const half = sorted.length >> 1;
    return sorted.length % 2 ? sorted[half] : (sorted[half - 1] + sorted[half]) / 2;
  }

  // Reported numbers plus what they change by; null where there is none, undefined where it is not worked out.
  function changed(reported, before, after) {
    const moved = (key, value) => (key in after ? value + after[key] - before[key] : undefined);
    const entries = Object.entries(reported).map(([key, value]) => [key, value === null ? null : moved(key, value)]);
    return Object.fromEntries(entries);
  }

  function classOf(value, criterion) {
    if (value === null || Number.isNaN(value)) return null;
    let found = criterion.classes[0];
    for (const kind of criterion.classes.slice(1)) {
      if (kind.holds_low ? value >= kind.low : value > kind.low) found = kind;
    }
    return found;
  }

  // What keeps an item from a class: its own emissivity, or that of what a ΔT of a finding is taken against, too low.
  // Walls, panes and roofs that shiny may show what they mirror: then not even an urgency.
  function doubtsOf(view, item) {
    const { data, shared } = view.frame;
    const names = data.optics_names;
    const isShiny = (part) => !(view.values[names[part.optics].emissivity] >= shared.constants.least_emissivity);
    const own = item.areas.whole.some(isShiny);
    const mirrors = item.mirrors || (data.kind === "building" && item.kind === "finding" && own);
    if (item.kind === "component" || !data.reference) return { reflective: own, mirrors };
    const weight = (part) => part.w[0].reduce((sum, w) => sum + Math.abs(w), 0);
    const most = data.reference.parts.reduce((best, part) => (weight(part) > weight(best) ? part : best));
    return { reflective: own || isShiny(most), mirrors };
  }

  // A rise is judged as it reads and, where there is wind to correct for, as it would be in calm.
  function keysOf(quantity, numbers) {
    const asRead = quantity.replace(/_in_calm_k$/, "_k");
    const pair = [asRead, asRead.replace(/_k$/, "_in_calm_k")].filter((key) => (numbers[key] ?? null) !== null);
    return pair.length ? pair : [quantity];
  }

  // One assessment again: class and urgency, neither where the number does not allow it; of two, the more urgent.
  function assessed(one, item, numbers, shared, doubts) {
    const criterion = shared.criteria[one.criterion];
    const [graded, least] = criterion.graded_from ?? [null, 0];
    const none = { name: null, urgency: null };
    if (doubts.mirrors || (item.unconfirmed && one.magnitude)) return none;
    if (graded && !keysOf(graded, numbers).some((key) => numbers[key] >= least)) {
      return { ...none, isUngraded: true };
    }
    if (numbers[one.quantity] === undefined) return { ...none, isUnknown: true };
    const kinds = keysOf(one.quantity, numbers).map((key) => {
      const value = numbers[key] ?? null;
      return classOf(one.magnitude && value !== null ? Math.abs(value) : value, criterion);
    });
    const worst = kinds.filter(Boolean).reduce((most, kind) => (most?.urgency >= kind.urgency ? most : kind), null);
    return worst ? { name: doubts.reflective ? null : worst.name, urgency: worst.urgency } : none;
  }

  function mostUrgent(assessments) {
    const known = assessments.filter((one) => one.urgency !== null);
    return known.reduce((most, one) => (most?.urgency >= one.urgency ? most : one), null);
  }

  // The assessment that governs: with a twin the comparison with it decides, else what needs none; of these the most
  // urgent.  Whether a whole group is warm stays as reported.
  function governed(item, found, numbers) {
    if (item.kind === "finding") return mostUrgent(found);
    const isMeasured = (one) => (numbers[one.quantity.replace("_in_calm", "")] ?? null) !== null;
    const compares = (one) => one.against === "twin" && isMeasured(one) && !one.isUngraded;
    const isCompared = item.has_twin && found.some(compares);
    const candidates = found.filter((one) => one.against !== (isCompared ? "air" : "twin"));
    return mostUrgent(candidates.length ? candidates : found);
  }

  // One item under assumptions: its numbers, the class that governs, and whether its surface is too reflective.
  function judged(view, item, items, references) {
    const stored = { numbers: item.reported, class: item.class, urgency: item.urgency, by: item.by, reflective: false };
    if (!item.areas || view.isStored) return { ...stored, isWorkedOut: Boolean(item.areas) };
    const before = numbersOf(Frames.under(view.frame, {}), item, items, references.stored);
    const numbers = changed(item.reported, before, numbersOf(view, item, items, references.now));
    const doubts = doubtsOf(view, item);
    const found = item.judged.map((one) => ({ ...one, ...assessed(one, item, numbers, view.frame.shared, doubts) }));
    const governing = governed(item, found, numbers) ?? { name: null, urgency: null, by: item.by };
    return {
      numbers,
      class: governing.name,
      urgency: governing.urgency,
      by: governing.by,
      reflective: doubts.reflective,
      isUnknown: found.some((one) => one.isUnknown),
      isWorkedOut: true,
    };
  }

  // All items of a frame under a view, in the order of the data.
  function consequences(view) {
    const { findings, components } = view.frame.data;
    const stored = Frames.under(view.frame, {});
    const references = { stored: Frames.referenceOf(stored), now: Frames.referenceOf(view) };
    return [
      ...findings.map((item) => ({ item, ...judged(view, item, findings, references) })),
      ...components.map((item) => ({ item, ...judged(view, item, components, references) })),
    ];
  }

  return { consequences, classOf };
})();
