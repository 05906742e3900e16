/** Core samples held against the foam's density limits; see fieldapp/reckoning/cores.py. */

import { densityKgM3, plusMinusKgM3 } from "./density.js";
import { atLeast, atMost } from "./limits.js";

function word(core, low, high, density, plusMinus) {
  if (core.withSkin) return "with skin";
  if (low === null && high === null) return "no limits";
  if (plusMinus && [low, high].some((limit) => limit !== null && Math.abs(density - limit) <= plusMinus)) {
    return "unproven";
  }
  if (low !== null && !atLeast(density, low)) return "light";
  if (high !== null && !atMost(density, high)) return "heavy";
  return "within";
}

/** Density, plus-minus and word of a core. */
export function coreResult(core, foam) {
  const density = densityKgM3(core.massG, core.volumeM3);
  const measured = core.sizesMm.length && core.scaleStepG !== null && core.calliperStepMm !== null;
  const plusMinus = measured
    ? plusMinusKgM3(density, core.massG, core.scaleStepG, core.sizesMm, core.calliperStepMm)
    : null;
  return {
    record: core.record,
    bay: core.bay,
    label: core.label || core.bayLabel,
    kg_m3: density,
    plus_minus_kg_m3: plusMinus,
    word: word(core, foam?.densityMinKgM3 ?? null, foam?.densityMaxKgM3 ?? null, density, plusMinus),
  };
}

/** Densities of all cores of a surface. [kg/m3] */
export function densityFigures(cores, foam) {
  const each = cores.map((core) => coreResult(core, foam));
  let total = 0.0;
  for (const core of each) total += core.kg_m3;
  const all = each.map((core) => core.kg_m3);
  return {
    cores: each.length,
    mean_kg_m3: each.length ? total / each.length : null,
    min_kg_m3: each.length ? Math.min(...all) : null,
    max_kg_m3: each.length ? Math.max(...all) : null,
    each,
  };
}
