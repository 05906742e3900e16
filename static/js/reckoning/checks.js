/** The checks of a surface, in their order; see fieldapp/reckoning/checks.py. */

import { atLeast, atMost, depthMeets, depthOver } from "./limits.js";
import { singlePointMm } from "./bays.js";
import { shortBaysAtMost } from "./sampling.js";
import { SEPARATE_RETARDER_NG, sheetMustBeInside } from "./vapour.js";
import { SHORT_WORDS, bayList, count } from "./wording.js";

export const NOTHING_READ = "nothing was read";
export const NO_BASIS = "the contract's basis is not stated";

const check = (id, result, asked, found, word) => ({
  id,
  result,
  word: result === "short" ? (word ?? SHORT_WORDS[id] ?? "short") : result,
  asked,
  found,
});

const held = (meets) => (meets ? "meets" : "short");

/** Bays by name, in order. */
const named = (seen, bays) =>
  bayList(
    bays.map((bay) => bay.label),
    seen.bays.map((bay) => bay.label),
  );

const readBays = (seen) => seen.bays.filter((bay) => bay.is_read).length;

/** Every laid-out bay is read, and enough of all bays are. */
function coverage(seen, words) {
  const shareMin = seen.surface.spec.baysShareMin;
  const read = readBays(seen);
  const total = seen.baysTotal;
  const unread = seen.bays.filter((bay) => !bay.is_read);
  const meets = seen.bays.length > 0 && !unread.length && atLeast(read / total, shareMin);
  let asked = `all of ${count(total, "bay")} read`;
  if (shareMin < 1.0) asked = `${words.percent(shareMin)} of ${count(total, "bay")} read, and every bay laid out`;
  let found = `${read} of ${count(total, "bay")} read`;
  if (unread.length && read) found += `; not read: ${named(seen, unread)}`;
  if (total > seen.bays.length) found += `; ${total - seen.bays.length} not laid out`;
  if (seen.surface.baysTotalStated < seen.bays.length) {
    found += `; ${seen.surface.baysTotalStated} were said to be there, ${seen.bays.length} are laid out`;
  }
  return check("coverage", meets ? "meets" : "unproven", asked, found);
}

/** The mean depth, where the basis asks one. */
function meanDepth(seen, words) {
  const { spec } = seen.surface;
  const { mean } = seen.depthMm;
  if (spec.basis === "minimum") return null;
  const stated = spec.basis !== null;
  const asked = stated ? `mean ${words.depth(spec.depthMm)}` : `${words.depth(spec.depthMm)}; ${NO_BASIS}`;
  if (mean === null) return check("mean-depth", "unproven", asked, NOTHING_READ);
  const found = `mean ${words.depthHeld(mean, spec.depthMm)}`;
  if (!stated) return check("mean-depth", "unproven", asked, found);
  return check("mean-depth", held(depthMeets(mean, spec.depthMm)), asked, found);
}

/** Every single reading and low spot, where the basis asks something of each. */
function lowestDepth(seen, words) {
  const { spec } = seen.surface;
  const lowest = seen.depthMm.min;
  if (spec.basis === "average") return null;
  const limit = singlePointMm(spec);
  const stated = spec.basis !== null;
  const asked = stated ? `nowhere under ${words.depth(limit)}` : `${words.depth(limit)}; ${NO_BASIS}`;
  if (lowest === null) return check("lowest-depth", "unproven", asked, NOTHING_READ);
  const where = seen.bays.find((bay) => bay.min_mm === lowest);
  const lowSpot = where.low_spot_mm === lowest ? ", a low spot" : "";
  let found = `lowest ${words.depthHeld(lowest, limit)} (bay ${where.label}${lowSpot})`;
  if (!stated) return check("lowest-depth", "unproven", asked, found);
  const short = seen.bays.filter((bay) => bay.lowest_depth === "short");
  if (short.length) found += `; short in ${named(seen, short)}`;
  return check("lowest-depth", held(!short.length), asked, found);
}

/** The share of the area under the specified depth, where the contract limits it. */
function underSpray(seen, words) {
  const limit = seen.surface.spec.underAreaShareMax;
  const share = seen.underSpray.area_share;
  if (limit === null) return null;
  const depth = words.depth(seen.surface.spec.depthMm);
  const asked = `at most ${words.percent(limit)} of the area under ${depth}`;
  if (share === null) return check("under-spray", "unproven", asked, NOTHING_READ);
  const found = `${words.percentHeld(share, limit)} of the ${words.percent(seen.readShare)} read is under ${depth}`;
  return check("under-spray", held(atMost(share, limit)), asked, found);
}

/** The resistance asked, held against delivered R (or nominal, where the contract says so). */
function deliveredR(seen, words) {
  const { spec } = seen.surface;
  if (spec.rsi === null) return null;
  const nominal = spec.rBasis === "nominal";
  const value = nominal ? seen.rsi.nominal : seen.rsi.delivered;
  const asked = `${words.r(spec.rsi)} ${spec.rBasis}`;
  if (value === null) return check("delivered-r", "unproven", asked, NOTHING_READ);
  const text = words.rHeld(value, spec.rsi);
  let found = nominal ? `${text} at the mean depth` : `at most ${text} by these readings`;
  if (seen.rsi.beyond_tested) found += "; some depths lie outside the foam's tested table";
  return check("delivered-r", held(atLeast(value, spec.rsi)), asked, found);
}

const anythingRead = (seen) => seen.depthMm.min !== null;

function otherRule(seen, words) {
  const rule = seen.surface.vapour;
  return rule.rule === "none"
    ? `no ${words.vapor} rule: ${rule.reason}`
    : `a separate ${words.vapor} retarder of at most ${words.permeance(SEPARATE_RETARDER_NG)}`;
}

/** The vapour rule, whichever of the four it is. */
function vapour(seen, words) {
  const rule = seen.surface.vapour;
  if (rule.rule === "depth") {
    const where = rule.measure === "bay-mean" ? ", mean of every bay" : " in every bay";
    return vapourByBay(seen, words, `${words.depth(rule.depthMm ?? 0.0)} as ${words.vapor} depth${where}`);
  }
  if (rule.rule === "permeance") {
    return vapourByBay(seen, words, `at most ${words.permeance(rule.permNg ?? 0.0)} in every bay`);
  }
  if (!anythingRead(seen)) return check("vapour", "unproven", otherRule(seen, words), NOTHING_READ);
  return rule.rule === "separate" ? vapourSeparate(seen, words) : vapourNone(seen, words);
}

function vapourByBay(seen, words, asked) {
  const { foam } = seen.surface;
  const rule = seen.surface.vapour;
  if (!anythingRead(seen) || foam === null) return check("vapour", "unproven", asked, NOTHING_READ);
  const short = seen.bays.filter((bay) => bay.vapour === "short");
  const meeting = seen.bays.filter((bay) => bay.vapour === "meets").length;
  const total = seen.baysTotal;
  if (short.length) {
    if (rule.rule === "depth" && foam.cell !== "closed") {
      return check("vapour", "short", asked, `open-cell foam retards no ${words.vapor} at any depth`);
    }
    return check("vapour", "short", asked, `not reached in ${named(seen, short)}`);
  }
  if (rule.rule === "permeance" && foam.permeabilityNgM === null) {
    return check("vapour", "unproven", asked, "the foam's permeability is not given");
  }
  if (meeting === total) return check("vapour", "meets", asked, `reached in all of ${count(total, "bay")}`);
  const read = readBays(seen);
  if (rule.bySample && read && seen.surface.chosen === "random") {
    const most = shortBaysAtMost(total, read, 0);
    return check("vapour", "meets", asked, `by sample: up to ${most} of ${total} may be short`);
  }
  let found = `reached in ${meeting} of ${count(total, "bay")}; ${total - meeting} not read`;
  if (rule.bySample) found += ", and those read were not picked at random";
  return check("vapour", "unproven", asked, found);
}

function vapourSeparate(seen, words) {
  const rule = seen.surface.vapour;
  const zone = seen.climateZone;
  let asked = otherRule(seen, words);
  const perm = rule.retarderPermNg ?? 0.0;
  const cold = zone !== null && sheetMustBeInside(zone);
  if (cold) asked += `, inside (zone ${zone})`;
  const found = `${rule.retarderName}, ${words.permeanceHeld(perm, SEPARATE_RETARDER_NG)}, ${rule.retarderSide}`;
  const tight = atMost(perm, SEPARATE_RETARDER_NG);
  const inside = rule.retarderSide === "inside";
  if (tight && !inside && zone === null) {
    return check("vapour", "unproven", asked, `${found}; the climate zone is not given`);
  }
  return check("vapour", held(tight && (inside || !cold)), asked, found, "against");
}

function vapourNone(seen, words) {
  const rule = seen.surface.vapour;
  const zone = seen.climateZone;
  const { foam } = seen.surface;
  const asked = otherRule(seen, words);
  if (foam !== null && foam.cell !== "closed" && !rule.acceptedBy) {
    if (zone === null) return check("vapour", "unproven", asked, "open cell, and the climate zone is not given");
    if (sheetMustBeInside(zone)) {
      return check("vapour", "unproven", asked, `open cell in zone ${zone}: the code official's word is needed`);
    }
  }
  return check("vapour", "meets", asked, `nothing is asked${rule.acceptedBy ? `, accepted by ${rule.acceptedBy}` : ""}`);
}

/** Enough cores, none of them light or heavy, or so near a limit that nobody can say. */
function density(seen, words) {
  const { spec, foam } = seen.surface;
  const found = seen.density;
  if (!spec.coresMin && !found.cores) return null;
  const low = foam?.densityMinKgM3 ?? null;
  const high = foam?.densityMaxKgM3 ?? null;
  let limits = [low, high]
    .filter((limit) => limit !== null)
    .map((limit) => words.density(limit))
    .join(" to ");
  if (low === null || high === null) {
    limits = limits ? `${high === null ? "at least" : "at most"} ${limits}` : "no limits named for the foam";
  }
  const asked = spec.coresMin ? `${count(spec.coresMin, "core")}, ${limits}` : limits;
  if (!found.cores) return check("density", "unproven", asked, "no core weighed");
  const ends = [found.min_kg_m3, found.max_kg_m3].map((value) => words.densityHeld(value, low, high));
  let text = `${count(found.cores, "core")}, ${ends[0] === ends[1] ? ends[0] : ends.join(" to ")}`;
  const off = ["light", "heavy"].filter((word) => found.each.some((core) => core.word === word));
  if (off.length) return check("density", "short", asked, text, off.join(" and "));
  const skinned = found.each.filter((core) => core.word === "with skin").length;
  if (skinned) text += `; ${skinned} with skin, not held against these limits`;
  const enough = found.cores - skinned >= Math.max(spec.coresMin, 1);
  if (found.each.some((core) => core.word === "unproven")) {
    return check("density", "unproven", asked, `${text}; a limit lies within the plus-minus`);
  }
  return check("density", enough ? "meets" : "unproven", asked, text);
}

/** No depth above the foam's tested limit, the framing's face or a code limit. */
function overDepth(seen, words) {
  const limit = seen.maxDepthMm;
  const high = seen.depthMm.max;
  if (limit === null) return null;
  const asked = `nowhere over ${words.depth(limit)}`;
  if (high === null) return check("over-depth", "unproven", asked, NOTHING_READ);
  const deep = seen.bays.filter((bay) => bay.max_mm !== null && depthOver(bay.max_mm, limit));
  let found = `highest ${words.depthHeldBelow(high, limit)}`;
  if (deep.length) found += `; too deep in ${named(seen, deep)}`;
  return check("over-depth", held(!deep.length), asked, found);
}

/** Everything noted as stop or repair is repaired, and an inspector has accepted it. */
function deficiencies(seen) {
  const { open, repaired, accepted } = seen.surface.deficiencies;
  if (!open && !repaired && !accepted) return null;
  const states = [
    [open, "open"],
    [repaired, "repaired, not accepted"],
    [accepted, "accepted"],
  ];
  const found = states
    .filter(([number]) => number)
    .map(([number, state]) => `${number} ${state}`)
    .join(", ");
  const result = open ? "short" : repaired ? "unproven" : "meets";
  return check("deficiencies", result, "each repaired and accepted", found);
}

/** In the order in which they are asked and reported. */
export const CHECKS = [
  coverage,
  meanDepth,
  lowestDepth,
  underSpray,
  deliveredR,
  vapour,
  density,
  overDepth,
  deficiencies,
];

/** All checks that the surface is asked, in order. */
export function ofSurface(seen, words) {
  const found = CHECKS.map((make) => make(seen, words)).filter((one) => one !== null);
  if (seen.unprovenBecause === null) return found;
  return found.map((one) => check(one.id, "unproven", one.asked, seen.unprovenBecause));
}
