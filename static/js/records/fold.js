/** Records in, one job out: any order, any repeats, one and the same job; see fieldapp/records/fold.py.
 *
 * This folder is pure: it may not touch the page, storage, network, clock or chance; of this app it imports only reckoning.
 */

import { spokenOfBy } from "./digest.js";
import { shown } from "./fields.js";
import { describes, inOrder } from "./record.js";

const BAY_FACTS = new Set(["reading", "low-spot", "touch-up", "core", "pull", "photo", "deficiency", "conditions"]);

/** Of these, the ones that may name a surface instead of a bay. */
const SURFACE_FACTS = new Set(["photo", "deficiency", "conditions"]);
/** Of these, the ones that name a point by row and column. */
const POINT_FACTS = new Set(["reading", "core", "photo"]);

/** The records hold no description of a job, or the job was removed. */
export class NoJobError extends Error {}

/** Fold records of one job, in any order, repeats allowed; `clashing` are ids known to be shared by differing records. */
export function fold(records, clashing = []) {
  const [once, refused] = oneOfEach(records, new Set(clashing));
  const [all, homeless] = baysWithoutSurface(once);
  refused.push(...homeless);
  const things = described(all);
  if (!things.job.size) throw new NoJobError("no record of kind 'job' says which job this is");
  const about = [...things.job.values()].reduce((a, b) => (inOrder(a.history[0], b.history[0]) <= 0 ? a : b));
  if (isRemoved(about)) throw new NoJobError("the job was removed");
  const surfaces = [...things.surface.values()].filter((thing) => !isRemoved(thing));
  const baysOf = new Map(surfaces.map((surface) => [surface.key, []]));
  for (const bay of things.bay.values()) {
    if (!isRemoved(bay)) baysOf.get(bay.body.surface)?.push(bay);
  }
  const known = new Set(things.bay.keys());
  const live = new Map([...baysOf.values()].flat().map((bay) => [bay.key, bay]));
  refused.push(...misfits(all, live, known, things.surface));
  const gone = new Set(refused.map((refusal) => refusal.id));
  const taken = all.filter((record) => !gone.has(record.id));
  const [withdrawn, idle] = withdrawals(taken);
  const out = new Set(withdrawn.map((pair) => pair.fact.id));
  const removed = new Set([...known].filter((key) => !live.has(key)));
  for (const thing of things.surface.values()) if (isRemoved(thing)) removed.add(thing.key);
  const facts = {};
  for (const record of taken) {
    if (describes(record) || out.has(record.id)) continue;
    if (belongsTo(record).some((key) => removed.has(key))) continue;
    (facts[record.kind] ??= []).push(record);
  }
  const places = ordered([...things.place.values()].filter((thing) => !isRemoved(thing)));
  const foams = [...things.foam.values()].filter((thing) => !isRemoved(thing));
  return {
    key: about.key,
    about,
    name: about.name,
    units: about.body.units,
    places,
    foams: new Map(foams.map((foam) => [foam.key, foam])),
    surfaces: surfacesInOrder(surfaces, places),
    bays: new Map([...baysOf].map(([key, bays]) => [key, ordered(bays)])),
    facts,
    withdrawn,
    idle,
    records: taken,
    refused: refused.sort((a, b) => compare(a.id, b.id) || compare(a.field, b.field)),
  };
}

const compare = (a, b) => (a < b ? -1 : a > b ? 1 : 0);

/** Each record once, in order; records that share an id but not their content are all refused. */
function oneOfEach(records, clashing) {
  const byId = new Map();
  for (const record of records) {
    const before = byId.get(record.id);
    if (before === undefined) byId.set(record.id, record);
    else if (before.canonical !== record.canonical) clashing.add(record.id);
  }
  const allowed = "one content for one id; nobody can say which of these is true";
  const refused = [...byId.keys()]
    .filter((id) => clashing.has(id))
    .map((id) => ({ id, field: "id", found: id, allowed }));
  return [[...byId.values()].filter((record) => !clashing.has(record.id)).sort(inOrder), refused];
}

/** True where a thing's latest description takes it out of the job. */
const isRemoved = (thing) => thing.body.removed === true;

/** Descriptions of bays of a surface that was never described are refused; an earlier, good one still stands. */
function baysWithoutSurface(taken) {
  const surfaces = new Set(taken.filter((record) => record.kind === "surface").map((record) => record.body.key));
  const isHomeless = ({ kind, body }) => kind === "bay" && body.removed !== true && !surfaces.has(body.surface);
  const allowed = "the key of a surface of this job";
  const refused = taken
    .filter(isHomeless)
    .map(({ id, body }) => ({ id, field: "surface", found: shown(body.surface), allowed }));
  return [taken.filter((record) => !isHomeless(record)), refused];
}

/** Things by kind and key, each with its history; the latest description of a key describes it. */
function described(taken) {
  const things = { job: new Map(), place: new Map(), foam: new Map(), surface: new Map(), bay: new Map() };
  for (const record of taken) {
    if (!describes(record)) continue;
    const { key } = record.body;
    const history = [...(things[record.kind].get(key)?.history ?? []), record];
    const { body } = record;
    things[record.kind].set(key, { key, body, history, name: String(body.name || body.label || "") });
  }
  return things;
}

/** Facts about bays and surfaces that are not there, and points outside a bay's grid. */
function misfits(taken, live, known, surfaces) {
  const refused = [];
  for (const record of taken) {
    const owner = SURFACE_FACTS.has(record.kind) ? record.body.surface : null;
    if (owner != null && !surfaces.has(owner)) {
      refused.push({ id: record.id, field: "surface", found: shown(owner), allowed: "the key of a surface of this job" });
      continue;
    }
    const { bay } = record.body;
    if (BAY_FACTS.has(record.kind) && bay != null) {
      if (!known.has(bay)) {
        refused.push({ id: record.id, field: "bay", found: shown(bay), allowed: "the key of a bay of this job" });
      } else if (live.has(bay) && POINT_FACTS.has(record.kind)) {
        const misfit = outside(record, live.get(bay));
        if (misfit) refused.push(misfit);
      }
    } else if (record.kind === "covered") {
      const unknown = record.body.bays.find((key) => !known.has(key));
      if (unknown !== undefined) {
        refused.push({ id: record.id, field: "bays", found: shown(unknown), allowed: "keys of bays of this job" });
      }
    }
  }
  return refused;
}

function outside(record, bay) {
  for (const [name, count] of [
    ["row", bay.body.rows],
    ["col", bay.body.cols],
  ]) {
    const value = record.body[name];
    if (value != null && value >= count) {
      return { id: record.id, field: name, found: shown(value), allowed: `0 to ${count - 1} in bay ${shown(bay.name)}` };
    }
  }
  return null;
}

/** What is withdrawn by what; and withdrawals that act on nothing. Going from the latest to the earliest. */
function withdrawals(taken) {
  const byId = new Map(taken.map((record) => [record.id, record]));
  const out = new Map();
  const idle = [];
  for (const record of [...taken].reverse()) {
    if (record.kind !== "withdrawal" || out.has(record.id)) continue;
    const target = byId.get(record.body.record);
    if (target === undefined || describes(target) || inOrder(target, record) >= 0) idle.push(record);
    else if (!out.has(target.id)) out.set(target.id, record);
  }
  const pairs = [...out].map(([id, by]) => ({ fact: byId.get(id), by }));
  return [pairs.sort((a, b) => inOrder(a.fact, b.fact)), idle.reverse()];
}

/** What a fact goes with when that is removed: one bay or surface, or all of several. */
const belongsTo = (record) => (["covered", "spray", "signature"].includes(record.kind) ? [] : spokenOfBy(record));

const ordered = (things) =>
  [...things].sort((a, b) => (a.body.order ?? 0) - (b.body.order ?? 0) || inOrder(a.history[0], b.history[0]));

/** By place, then as they were first described. */
function surfacesInOrder(surfaces, places) {
  const rank = new Map(places.map((place, number) => [place.key, number + 1]));
  const of = (surface) => rank.get(surface.body.place) ?? 0;
  return [...surfaces].sort((a, b) => of(a) - of(b) || inOrder(a.history[0], b.history[0]));
}
