/** One surface: its bays, their sums, and what follows from them; see fieldapp/reckoning/surface.py. */

import { bayResult, isShort } from "./bay_results.js";
import { NO_TOUCH_UP, bayFigures, bayShortfall, pointLimitMm, touchUp } from "./bays.js";
import { ofSurface } from "./checks.js";
import { densityFigures } from "./cores.js";
import { depthMeets } from "./limits.js";
import { filmsRsi, steelFrameRsi, woodFrameU } from "./resistance.js";
import { CONFIDENCE, meanLowerBoundMm, shortBaysAtMost } from "./sampling.js";
import { vapourClass } from "./vapour.js";

/** Short where any is short, else unproven where any is or there is none, else meets. */
export function worst(results) {
  if (results.includes("short")) return "short";
  return results.includes("unproven") || !results.length ? "unproven" : "meets";
}

const least = (values) => {
  const given = values.filter((value) => value !== null);
  return given.length ? given.reduce((a, b) => Math.min(a, b)) : null;
};

const most = (values) => {
  const given = values.filter((value) => value !== null);
  return given.length ? given.reduce((a, b) => Math.max(a, b)) : null;
};

/** The lower of the foam's and the surface's greatest depth; null where neither is given. [mm] */
export const greatestDepthMm = (surface) => least([surface.maxDepthMm, surface.foam?.maxDepthMm ?? null]);

/** Everything that is reckoned of one surface, in the shape that is printed. */
export function reckonSurface(surface, climateZone, words) {
  const because = unprovenBecause(surface);
  const seriesRsi = filmsRsi(surface.assembly, surface.filmInRsi, surface.filmOutRsi);
  const limitMm = pointLimitMm(surface.foam, surface.spec, surface.vapour);
  const minPassMm = surface.foam?.minPassMm ?? 0.0;
  const figures = surface.bays.map((bay) => bayFigures(bay, surface.foam, seriesRsi));
  const lacks = surface.bays.map((bay, i) => bayShortfall(bay, figures[i], surface.spec, limitMm, minPassMm));
  const sums = sumsOf(figures);
  const maxDepthMm = greatestDepthMm(surface);
  const bays = surface.bays.map((bay, i) =>
    bayResult(surface, bay, figures[i], lacks[i], seriesRsi, maxDepthMm, because === null),
  );
  const baysTotal = Math.max(surface.baysTotalStated, bays.length);
  const sampling = samplingOf(surface, figures, bays, baysTotal);
  let areaM2 = 0.0;
  for (const bay of surface.bays) areaM2 += bay.areaM2;
  const readShare = areaM2 > 0.0 ? ((sums.areaM2 / areaM2) * surface.bays.length) / baysTotal : 0.0;
  const depthMm = depthsOf(sums, figures);
  const rsi = resistancesOf(surface, figures, sums, seriesRsi);
  const underSpray = underSprayOf(sums, lacks);
  const density = densityFigures(surface.cores, surface.foam);
  const seen = {
    surface,
    climateZone,
    bays,
    baysTotal,
    readShare,
    depthMm,
    rsi,
    underSpray,
    density,
    maxDepthMm,
    unprovenBecause: because,
  };
  const checks = ofSurface(seen, words);
  const total = (of) => bays.reduce((sum, bay) => sum + of(bay), 0);
  return {
    key: surface.key,
    place: surface.place,
    name: surface.name,
    result: because ? "unproven" : worst(checks.map((check) => check.result)),
    unproven_because: because,
    bays_total: baysTotal,
    bays_laid_out: bays.length,
    bays_read: bays.filter((bay) => bay.is_read).length,
    points: total((bay) => bay.points),
    points_read: sums.pointsRead,
    points_blocked: total((bay) => bay.points_blocked),
    points_disagreeing: surface.bays.reduce((sum, bay) => sum + bay.disagreeing, 0),
    points_read_again: surface.bays.reduce((sum, bay) => sum + bay.readAgain, 0),
    area_m2: areaM2,
    area_read_m2: sums.areaM2,
    read_share: readShare,
    depth_mm: depthMm,
    rsi,
    u_w_m2k: framedU(surface, sums, rsi.delivered),
    under_spray: underSpray,
    vapour: vapourFigures(surface, sums, bays),
    density,
    touch_up: touchUpOf(surface, sums, lacks, limitMm, maxDepthMm),
    sampling,
    checks,
    bays,
  };
}

function unprovenBecause(surface) {
  if (surface.foam === null) return "its foam is not described, or was removed";
  return surface.bays.length ? null : "no bays are laid out";
}

function sumsOf(figures) {
  const sums = { pointsRead: 0, areaM2: 0.0, sumDepthMm: 0.0, areaDepth: 0.0, conductance: 0.0, flow: 0.0 };
  for (const bay of figures) {
    sums.pointsRead += bay.pointsRead;
    sums.areaM2 += bay.areaM2;
    sums.sumDepthMm += bay.sumDepthMm;
    sums.areaDepth += bay.areaDepth;
    sums.conductance += bay.conductance;
    sums.flow = sums.flow === null || bay.flow === null ? null : sums.flow + bay.flow;
  }
  return sums;
}

const meanMm = (sums) => (sums.pointsRead ? sums.areaDepth / sums.areaM2 : null);

function depthsOf(sums, figures) {
  let sd = null;
  if (sums.pointsRead > 1) {
    const middle = sums.sumDepthMm / sums.pointsRead;
    let squares = 0.0;
    for (const bay of figures) {
      if (!bay.pointsRead) continue;
      const off = bay.sumDepthMm / bay.pointsRead - middle;
      squares += bay.squaresMm2 + bay.pointsRead * off * off;
    }
    sd = Math.sqrt(squares / (sums.pointsRead - 1));
  }
  return {
    mean: meanMm(sums),
    min: least(figures.map((bay) => bay.lowestMm)),
    max: most(figures.map((bay) => bay.highMm)),
    sd,
  };
}

function resistancesOf(surface, figures, sums, seriesRsi) {
  const mean = meanMm(sums);
  if (surface.foam === null || mean === null) {
    return { nominal: null, delivered: null, uneven_loss: null, in_assembly: null, beyond_tested: false };
  }
  const nominal = surface.foam.resistance.rsi(mean);
  const delivered = sums.areaM2 / sums.conductance - seriesRsi;
  const layers = layersRsi(surface);
  let inAssembly = null;
  if (surface.layers.length && layers !== null) {
    const withLayers = seriesRsi + layers;
    inAssembly = 1.0 / clearU(surface, sums, withLayers) - withLayers;
  }
  return {
    nominal,
    delivered,
    uneven_loss: nominal - delivered,
    in_assembly: inAssembly,
    beyond_tested: figures.some((bay) => bay.beyondTested),
  };
}

/** All layers but the foam; null where one of them has no resistance given. [m2K/W] */
function layersRsi(surface) {
  let total = 0.0;
  for (const layer of surface.layers) {
    if (layer.isFoam) continue;
    if (layer.rsi === null) return null;
    total += layer.rsi;
  }
  return total;
}

/** U through the foam alone, with another resistance in series than the films. [W/(m2K)] */
function clearU(surface, sums, seriesRsi) {
  let conductance = 0.0;
  for (const bay of surface.bays) {
    bay.depthsMm.forEach((depth, i) => {
      if (depth !== null) conductance += bay.areasM2[i] / (seriesRsi + surface.foam.resistance.rsi(depth));
    });
  }
  return conductance / sums.areaM2;
}

function framedU(surface, sums, deliveredRsi) {
  const { framing } = surface;
  const layers = layersRsi(surface);
  if (framing === null || layers === null || deliveredRsi === null) return null;
  const seriesRsi = filmsRsi(surface.assembly, surface.filmInRsi, surface.filmOutRsi) + layers;
  if (framing.material === "steel") {
    if (framing.depthMm === null || framing.spacingMm === null) return null;
    const effective = steelFrameRsi(deliveredRsi, framing.depthMm, framing.spacingMm);
    return effective === null ? null : 1.0 / (seriesRsi + effective);
  }
  const clear = clearU(surface, sums, seriesRsi);
  if (!Number.isFinite(clear)) return null;
  if (framing.material === "none") return clear;
  if (framing.share === null || framing.depthMm === null) return null;
  return woodFrameU(clear, framing.share, framing.depthMm, seriesRsi);
}

function underSprayOf(sums, lacks) {
  if (!sums.pointsRead) return { area_share: null, deep_area_share: null, area_m2: null, missing_m3: null };
  let under = 0.0;
  let deep = 0.0;
  let missing = 0.0;
  for (const lack of lacks) {
    under += lack.underM2;
    deep += lack.deepUnderM2;
    missing += lack.missingM3;
  }
  return {
    area_share: under / sums.areaM2,
    deep_area_share: deep / sums.areaM2,
    area_m2: under,
    missing_m3: missing,
  };
}

function touchUpOf(surface, sums, lacks, limitMm, maxDepthMm) {
  if (!sums.pointsRead) return NO_TOUCH_UP;
  let volume = 0.0;
  let order = 0.0;
  let after = 0.0;
  let afterOrder = 0.0;
  let deepest = 0.0;
  let highest = 0.0;
  for (const lack of lacks) {
    volume += lack.touchUpM3;
    order += lack.orderM3;
    after += lack.areaAfter;
    afterOrder += lack.areaAfterOrder;
    deepest = Math.max(deepest, lack.deepestMm);
    highest = Math.max(highest, lack.highestAfterMm);
  }
  const { spec } = surface;
  if (spec.basis === "average" || spec.basis === "average-with-floor") {
    const lackOf = (mean) => (depthMeets(mean, spec.depthMm) ? 0.0 : spec.depthMm - mean);
    const meanLack = lackOf(after / sums.areaM2);
    volume += (meanLack * sums.areaM2) / 1000.0;
    order += (lackOf(afterOrder / sums.areaM2) * sums.areaM2) / 1000.0;
    deepest = Math.max(deepest, meanLack);
    highest = Math.max(highest, meanLack ? limitMm + meanLack : 0.0);
  }
  return touchUp(volume, order, deepest, highest, surface.foam, maxDepthMm);
}

function samplingOf(surface, figures, bays, baysTotal) {
  const read = bays.map((_, i) => i).filter((i) => figures[i].isRead);
  const none = { confidence: CONFIDENCE, mean_lower_mm: null, short_bays_at_most: null };
  if (!read.length || !(surface.chosen === "random" || read.length === baysTotal) || surface.foam === null) return none;
  const sample = read.map((i) => ({
    areaM2: surface.bays[i].areaM2,
    meanMm: figures[i].areaDepth / figures[i].areaM2,
    varianceMm2: figures[i].varianceMm2,
    points: figures[i].pointsRead,
  }));
  const judged = read.some((i) =>
    [bays[i].lowest_depth, bays[i].vapour].some((result) => result === "short" || result === "meets"),
  );
  const shortRead = read.filter((i) => isShort(bays[i])).length;
  const knownShort = bays.filter(isShort).length;
  return {
    confidence: CONFIDENCE,
    mean_lower_mm: meanLowerBoundMm(sample, baysTotal),
    short_bays_at_most: judged ? Math.max(knownShort, shortBaysAtMost(baysTotal, read.length, shortRead)) : null,
  };
}

function vapourFigures(surface, sums, bays) {
  const { rule } = surface.vapour;
  const counted = rule === "depth" || rule === "permeance";
  const tally = (result) => (counted ? bays.filter((bay) => bay.vapour === result).length : null);
  const mu = surface.foam?.permeabilityNgM ?? null;
  const given = mu !== null && sums.pointsRead && sums.flow !== null;
  const permeance = given ? (sums.flow * mu * 1000.0) / sums.areaM2 : null;
  return {
    rule,
    required_mm: rule === "depth" ? surface.vapour.depthMm : null,
    bays_meets: tally("meets"),
    bays_short: tally("short"),
    bays_unproven: tally("unproven"),
    permeance_ng: permeance,
    retarder_class: permeance === null ? null : vapourClass(permeance),
  };
}
