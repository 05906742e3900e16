/** The result of one bay, from its figures; see fieldapp/reckoning/bay_results.py. */

import { NO_TOUCH_UP, bayPermeanceNg, singlePointMm, touchUp } from "./bays.js";
import { atMost, depthMeets, depthOver } from "./limits.js";

/** True where a bay is short in lowest depth or by the vapour rule. */
export const isShort = (bay) => bay.lowest_depth === "short" || bay.vapour === "short";

/** One bay's result: lowest depth, greatest depth, vapour depth and its own reading. */
export function bayResult(surface, bay, found, lack, seriesRsi, maxDepthMm, provable) {
  const { foam } = surface;
  const lowestDepth = provable ? bayLowestDepth(surface, found) : "unproven";
  const vapour = bayVapour(surface, found, provable);
  const tooDeep = maxDepthMm !== null && found.highMm !== null && depthOver(found.highMm, maxDepthMm);
  let result = found.isRead ? "meets" : "unproven";
  if (!provable || lowestDepth === "unproven" || vapour === "unproven") result = "unproven";
  if (provable && (tooDeep || lowestDepth === "short" || vapour === "short")) result = "short";
  const repair = found.pointsRead
    ? touchUp(lack.touchUpM3, lack.orderM3, lack.deepestMm, lack.highestAfterMm, foam, maxDepthMm)
    : NO_TOUCH_UP;
  return {
    key: bay.key,
    label: bay.label,
    result,
    round: bay.round,
    points: found.points,
    points_read: found.pointsRead,
    points_blocked: bay.blocked.size,
    mean_mm: found.meanMm,
    min_mm: found.lowestMm,
    max_mm: found.highMm,
    delivered_rsi: foam && found.pointsRead ? found.areaM2 / found.conductance - seriesRsi : null,
    permeance_ng: foam ? bayPermeanceNg(found, foam) : null,
    under_area_share: found.pointsRead ? lack.underM2 / found.areaM2 : null,
    missing_m3: found.pointsRead ? lack.missingM3 : null,
    vapour,
    touch_up_passes: repair.passes,
    is_read: found.isRead,
    waiting_for_reading: bay.waiting,
    points_disagreeing: bay.disagreeing,
    low_spot_mm: bay.lowSpotsMm.length ? Math.min(...bay.lowSpotsMm) : null,
    lowest_depth: lowestDepth,
    touch_up: repair,
  };
}

/** null where the basis asks nothing of a single point; unproven where no basis is stated. */
function bayLowestDepth(surface, found) {
  const { spec } = surface;
  if (spec.basis === "average") return null;
  if (spec.basis === null) return "unproven";
  if (found.lowestMm !== null && !depthMeets(found.lowestMm, singlePointMm(spec))) return "short";
  return found.isRead ? "meets" : "unproven";
}

/** null under rules that ask nothing of a bay. */
function bayVapour(surface, found, provable) {
  const { vapour, foam } = surface;
  if (vapour.rule !== "depth" && vapour.rule !== "permeance") return null;
  if (!provable || foam === null || found.lowestMm === null) return "unproven";
  if (vapour.rule === "permeance") return bayPermeance(found, foam, vapour.permNg ?? 0.0);
  if (foam.cell !== "closed") return "short";
  let depthMm = found.lowestMm;
  if (vapour.measure === "bay-mean") {
    if (!found.isRead || found.meanMm === null) return "unproven";
    depthMm = found.meanMm;
  }
  if (!depthMeets(depthMm, vapour.depthMm ?? 0.0)) return "short";
  return found.isRead ? "meets" : "unproven";
}

function bayPermeance(found, foam, limitNg) {
  if (foam.permeabilityNgM === null || !found.pointsRead) return "unproven";
  const permeance = bayPermeanceNg(found, foam);
  if (permeance === null) return "short";
  if (!found.isRead) return "unproven";
  return atMost(permeance, limitNg) ? "meets" : "short";
}
