/** Figures of one bay; the loops of fieldapp/reckoning/bays.py, sum for sum in the same order. */

import { DEPTH_TOLERANCE_MM, leastMeetingMm } from "./limits.js";
import { PerMetre, Table } from "./resistance.js";
import { M3_PER_BOARD_FOOT } from "./units.js";

export const BLOCKED_SHARE_MAX = 1.0 / 3.0;

/** All sums over a bay's points that were read; areas in m2, depths in mm. */
export function bayFigures(bay, foam, seriesRsi) {
  let read = 0;
  let area = 0.0;
  let sumDepth = 0.0;
  let shifted = 0.0;
  let shiftedSquares = 0.0;
  let areaDepth = 0.0;
  let conductance = 0.0;
  let flow = 0.0;
  let low = 0.0;
  let high = 0.0;
  let shift = 0.0;
  let bare = false;
  const resistance = foam ? foam.resistance : null;
  const rsiPerMm = resistance instanceof PerMetre ? resistance.rsiPerM / 1000.0 : 0.0;
  bay.depthsMm.forEach((depth, i) => {
    if (depth === null) return;
    const pointArea = bay.areasM2[i];
    if (read === 0) low = high = shift = depth;
    else if (depth < low) low = depth;
    else if (depth > high) high = depth;
    read += 1;
    area += pointArea;
    sumDepth += depth;
    const off = depth - shift;
    shifted += off;
    shiftedSquares += off * off;
    areaDepth += pointArea * depth;
    if (rsiPerMm) conductance += pointArea / (seriesRsi + rsiPerMm * depth);
    else if (resistance) conductance += pointArea / (seriesRsi + resistance.rsi(depth));
    if (depth > DEPTH_TOLERANCE_MM) flow += pointArea / depth;
    else bare = true;
  });
  let beyondTested = false;
  if (resistance instanceof Table && read) {
    const least = low > DEPTH_TOLERANCE_MM ? low : leastNotBare(bay);
    beyondTested = resistance.beyondTested(least) || resistance.beyondTested(high);
  }
  const squares = read ? shiftedSquares - (shifted * shifted) / read : 0.0;
  const points = bay.depthsMm.length;
  const reasons = [...bay.blocked.values()];
  const depths = read ? [low, ...bay.lowSpotsMm] : bay.lowSpotsMm;
  const squaresMm2 = squares > 0.0 ? squares : 0.0;
  return {
    points,
    pointsRead: read,
    areaM2: area,
    sumDepthMm: sumDepth,
    squaresMm2,
    areaDepth,
    lowMm: read ? low : null,
    highMm: read ? high : null,
    lowestMm: depths.length ? Math.min(...depths) : null,
    conductance,
    flow: bare ? null : flow,
    beyondTested,
    isRead:
      read > 0 &&
      read + reasons.length === points &&
      reasons.length <= points * BLOCKED_SHARE_MAX &&
      !reasons.includes("already-covered"),
    meanMm: read ? areaDepth / area : null,
    varianceMm2: read > 1 ? squaresMm2 / (read - 1) : null,
  };
}

/** Permeance of the points read; null without points, permeability, or where one is bare. [ng/(Pa s m2)] */
export const bayPermeanceNg = (found, foam) =>
  !found.pointsRead || found.flow === null || foam.permeabilityNgM === null
    ? null
    : (found.flow * foam.permeabilityNgM * 1000.0) / found.areaM2;

const leastNotBare = (bay) => {
  const depths = bay.depthsMm.filter((depth) => depth !== null && depth > DEPTH_TOLERANCE_MM);
  return depths.length ? Math.min(...depths) : 0.0;
};

/** The least depth that a basis asks of a single point; 0 where it asks only a mean. [mm] */
export const singlePointMm = (spec) => {
  if (spec.basis === "average") return 0.0;
  return spec.basis === "average-with-floor" ? (spec.floorMm ?? 0.0) : spec.depthMm;
};

/** The depth to which a touch-up brings every point. [mm] */
export function pointLimitMm(foam, spec, vapour) {
  const limit = singlePointMm(spec);
  const counts = vapour.rule === "depth" && vapour.depthMm !== null && (foam === null || foam.cell === "closed");
  return counts ? Math.max(limit, vapour.depthMm) : limit;
}

/** What the read points of a bay lack: to the specified depth, and to the point limit of a touch-up. */
export function bayShortfall(bay, figures, spec, limitMm, minPassMm) {
  const none = {
    underM2: 0.0,
    deepUnderM2: 0.0,
    missingM3: 0.0,
    touchUpM3: 0.0,
    orderM3: 0.0,
    deepestMm: 0.0,
    highestAfterMm: 0.0,
    areaAfter: 0.0,
    areaAfterOrder: 0.0,
  };
  if (figures.lowMm === null) return none;
  const meetsSpec = leastMeetingMm(spec.depthMm);
  const meetsDeep = leastMeetingMm(0.7 * spec.depthMm);
  const meetsLimit = leastMeetingMm(limitMm);
  const meetsBoth = Math.max(meetsSpec, meetsLimit);
  const { areaDepth } = figures;
  if (figures.lowMm >= meetsBoth) return { ...none, areaAfter: areaDepth, areaAfterOrder: areaDepth };
  let under = 0.0;
  let deepUnder = 0.0;
  let missing = 0.0;
  let added = 0.0;
  let ordered = 0.0;
  let deepest = 0.0;
  let highestAfter = 0.0;
  bay.depthsMm.forEach((depth, i) => {
    if (depth === null || depth >= meetsBoth) return;
    const area = bay.areasM2[i];
    if (depth < meetsSpec) {
      under += area;
      missing += area * (spec.depthMm - depth);
      if (depth < meetsDeep) deepUnder += area;
    }
    if (depth < meetsLimit) {
      const lack = limitMm - depth;
      const sprayed = Math.max(lack, minPassMm);
      added += area * lack;
      ordered += area * sprayed;
      deepest = Math.max(deepest, lack);
      highestAfter = Math.max(highestAfter, depth + sprayed);
    }
  });
  return {
    underM2: under,
    deepUnderM2: deepUnder,
    missingM3: missing / 1000.0,
    touchUpM3: added / 1000.0,
    orderM3: ordered / 1000.0,
    deepestMm: deepest,
    highestAfterMm: highestAfter,
    areaAfter: areaDepth + added,
    areaAfterOrder: areaDepth + ordered,
  };
}

/** Passes that the deepest missing depth takes; 0 where nothing is missing, null without the sheet's greatest pass. */
export function passes(deepestMissingMm, maxPassMm) {
  if (deepestMissingMm <= DEPTH_TOLERANCE_MM) return 0;
  return maxPassMm === null ? null : Math.ceil((deepestMissingMm - DEPTH_TOLERANCE_MM) / maxPassMm);
}

/** A touch-up from its volumes. */
export function touchUp(volumeM3, orderM3, deepestMm, highestAfterMm, foam, maxDepthMm) {
  const ordered = orderM3 / (1.0 - (foam?.lossShare ?? 0.0));
  const nominal = foam?.densityNominalKgM3 ?? null;
  return {
    volume_m3: volumeM3,
    board_feet: volumeM3 / M3_PER_BOARD_FOOT,
    order_m3: ordered,
    order_board_feet: ordered / M3_PER_BOARD_FOOT,
    mass_kg: nominal === null ? null : volumeM3 * nominal,
    passes: passes(deepestMm, foam?.maxPassMm ?? null),
    deepest_missing_mm: deepestMm,
    exceeds_max_depth: maxDepthMm !== null && volumeM3 > 0.0 && highestAfterMm > maxDepthMm + DEPTH_TOLERANCE_MM,
  };
}

/** Nothing was read, so nothing can be said of a touch-up. */
export const NO_TOUCH_UP = Object.freeze({
  volume_m3: null,
  board_feet: null,
  order_m3: null,
  order_board_feet: null,
  mass_kg: null,
  passes: null,
  deepest_missing_mm: null,
  exceeds_max_depth: false,
});
