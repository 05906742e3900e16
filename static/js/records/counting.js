/** Which reading counts: from a folded job to the job that is reckoned; see fieldapp/records/counting.py. */

import { depthOver } from "../reckoning/limits.js";
import {
  describedAreasM2,
  describedCore,
  describedFoam,
  describedFraming,
  describedSpec,
  describedVapour,
} from "./described.js";
import { bayAreaM2 } from "./kinds.js";
import { deficiencyHistories } from "./repairs.js";

export const DISAGREE_MM = 12.7;
export const DISAGREE_SHARE = 0.15;

/** The readings and low spots of a bay for one purpose, by the round with which they count. */
class BayCount {
  constructor(factor, opened) {
    this.factor = factor;
    this.opened = opened;
    this.points = new Map();
    this.lowSpots = new Map();
    this.unopened = [];
  }

  /** The round with which a reading counts: its own where a touch-up opened it, else the last one opened before. */
  countsWith(record) {
    const written = record.body.round;
    const countsWith = Math.max(1, ...[...this.opened].filter((round) => round <= written));
    if (countsWith !== written) this.unopened.push(record);
    return countsWith;
  }

  lastRoundOf(place) {
    return Math.max(...this.points.get(place).keys());
  }

  get lastRound() {
    return Math.max(1, ...[...this.points.keys()].map((place) => this.lastRoundOf(place)));
  }

  get waiting() {
    return Math.max(1, ...this.opened) > this.lastRound;
  }

  countingLowSpots() {
    return this.lowSpots.size ? this.lowSpots.get(Math.max(...this.lowSpots.keys())) : [];
  }

  depthsMm(place, round) {
    const found = this.points.get(place)?.get(round) ?? [];
    return found.filter((record) => record.body.depth_mm != null).map((record) => record.body.depth_mm * this.factor);
  }

  /** The depth that counts at a point, of the last round or of a given one: the lowest of that round. [mm] */
  depthMm(place, round = null) {
    if (!this.points.has(place)) return null;
    const depths = this.depthsMm(place, round ?? this.lastRoundOf(place));
    return depths.length ? Math.min(...depths) : null;
  }

  blocked(place) {
    const round = this.lastRoundOf(place);
    const reasons = this.points
      .get(place)
      .get(round)
      .map((record) => record.body.blocked)
      .filter((reason) => reason != null);
    return reasons.length && !this.depthsMm(place, round).length ? reasons[reasons.length - 1] : null;
  }

  disagreeing(place) {
    const depths = this.depthsMm(place, this.lastRoundOf(place));
    if (depths.length < 2) return false;
    const high = Math.max(...depths);
    return depthOver(high - Math.min(...depths), Math.max(DISAGREE_MM, DISAGREE_SHARE * high));
  }

  readAgain(place) {
    return [...this.points.get(place).keys()].some((round) => this.depthsMm(place, round).length > 1);
  }
}

/** 'inspection', or 'self-check' where the whole job has no inspection reading but self-checks. */
export function reportPurpose(job) {
  const read = [...(job.facts.reading ?? []), ...(job.facts["low-spot"] ?? [])];
  const own = read.length > 0 && read.every((record) => record.body.purpose === "self-check");
  return own ? "self-check" : "inspection";
}

/** Count a job for the purpose that its report rests on: {reckoned, bays}. */
export function count(job) {
  const purpose = reportPurpose(job);
  const counts = bayCounts(job, purpose);
  const other = purpose === "inspection" ? bayCounts(job, "self-check") : new Map();
  const cores = byBay(job.facts.core ?? []);
  const noted = deficiencies(job);
  const places = job.places.map((place) => ({ key: place.key, name: place.name }));
  const placeKeys = new Set(places.map((place) => place.key));
  const reckoned = {
    key: job.key,
    name: job.name,
    units: job.units,
    purpose,
    surfaces: job.surfaces.map((surface) => countedSurface(job, surface, counts, cores, noted, placeKeys)),
    places,
    climateZone: job.about.body.climate_zone ?? null,
    pairDifferencesMm: pairDifferencesMm(counts, other),
  };
  return { reckoned, bays: counts };
}

/** The cosine of the pitch where the probe is held plumb, else 1. */
const plumbFactor = (surface) =>
  surface.body.probe?.direction === "plumb" ? Math.cos((surface.body.probe.pitch_deg * Math.PI) / 180) : 1.0;

function byBay(records) {
  const found = new Map();
  for (const record of records) found.set(record.body.bay, [...(found.get(record.body.bay) ?? []), record]);
  return found;
}

function bayCounts(job, purpose) {
  const own = (kind) => byBay((job.facts[kind] ?? []).filter((record) => record.body.purpose === purpose));
  const readings = own("reading");
  const lowSpots = own("low-spot");
  const touchUps = byBay(job.facts["touch-up"] ?? []);
  const counts = new Map();
  for (const surface of job.surfaces) {
    const factor = plumbFactor(surface);
    for (const bay of job.bays.get(surface.key)) {
      const count = new BayCount(factor, new Set((touchUps.get(bay.key) ?? []).map((record) => record.body.round)));
      for (const record of readings.get(bay.key) ?? []) {
        const place = record.body.row * bay.body.cols + record.body.col;
        if (!count.points.has(place)) count.points.set(place, new Map());
        put(count.points.get(place), count.countsWith(record), record);
      }
      for (const record of lowSpots.get(bay.key) ?? []) put(count.lowSpots, count.countsWith(record), record);
      counts.set(bay.key, count);
    }
  }
  return counts;
}

const put = (map, key, value) => map.set(key, [...(map.get(key) ?? []), value]);

function pairDifferencesMm(inspection, selfCheck) {
  const differences = [];
  const rising = (values) => [...values].sort((a, b) => a - b);
  for (const [key, bay] of inspection) {
    const other = selfCheck.get(key);
    if (other === undefined) continue;
    for (const place of rising(bay.points.keys())) {
      if (!other.points.has(place)) continue;
      for (const round of rising(bay.points.get(place).keys())) {
        if (!other.points.get(place).has(round)) continue;
        const ours = bay.depthMm(place, round);
        const theirs = other.depthMm(place, round);
        if (ours !== null && theirs !== null) differences.push(ours - theirs);
      }
    }
  }
  return differences;
}

/** States of what is noted as stop or repair, by surface. */
function deficiencies(job) {
  const owner = new Map([...job.bays].flatMap(([key, bays]) => bays.map((bay) => [bay.key, key])));
  const states = new Map();
  for (const { deficiency, state } of deficiencyHistories(job)) {
    const { body } = deficiency;
    const surface = body.surface || owner.get(body.bay ?? "");
    if (surface === undefined || body.severity === "note") continue;
    if (!states.has(surface)) states.set(surface, { open: 0, repaired: 0, accepted: 0 });
    states.get(surface)[state] += 1;
  }
  return states;
}

function countedSurface(job, surface, counts, cores, noted, places) {
  const { body } = surface;
  const foam = job.foams.get(body.foam);
  const bays = job.bays.get(surface.key);
  return {
    key: surface.key,
    name: surface.name,
    assembly: body.assembly,
    foam: foam === undefined ? null : describedFoam(foam),
    baysTotalStated: body.bays_total,
    spec: describedSpec(body.spec),
    vapour: describedVapour(body.vapour),
    bays: bays.map((bay) => countedBay(bay, counts.get(bay.key))),
    place: places.has(body.place) ? body.place : null,
    chosen: body.chosen ?? null,
    cores: bays.flatMap((bay) => (cores.get(bay.key) ?? []).map((record) => describedCore(record, bay))),
    deficiencies: noted.get(surface.key) ?? { open: 0, repaired: 0, accepted: 0 },
    maxDepthMm: body.max_depth_mm ?? null,
    filmInRsi: body.film_in_rsi ?? null,
    filmOutRsi: body.film_out_rsi ?? null,
    framing: body.framing == null ? null : describedFraming(body.framing),
    layers: (body.layers ?? []).map((layer) => ({ rsi: layer.rsi ?? null, isFoam: layer.foam === true })),
  };
}

function countedBay(bay, found) {
  const { rows, cols } = bay.body;
  const blocked = new Map();
  for (const place of found.points.keys()) {
    const reason = found.blocked(place);
    if (reason !== null) blocked.set(place, reason);
  }
  const places = [...found.points.keys()];
  return {
    key: bay.key,
    label: bay.name,
    rows,
    cols,
    areaM2: bayAreaM2(bay.body),
    depthsMm: Array.from({ length: rows * cols }, (_, place) => found.depthMm(place)),
    areasM2: describedAreasM2(bay.body),
    blocked,
    lowSpotsMm: found.countingLowSpots().map((record) => record.body.depth_mm * found.factor),
    round: found.lastRound,
    waiting: found.waiting,
    disagreeing: places.filter((place) => found.disagreeing(place)).length,
    readAgain: places.filter((place) => found.readAgain(place)).length,
  };
}
