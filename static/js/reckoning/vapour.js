/** Classes of vapour retarders; see fieldapp/reckoning/vapour.py. */

import { atMost } from "./limits.js";
import { NG_PER_PERM } from "./units.js";

/** Upper limits of the classes. [ng/(Pa s m2)] */
export const CLASS_LIMITS_NG = [
  ["I", 0.1 * NG_PER_PERM],
  ["II", NG_PER_PERM],
  ["III", 10.0 * NG_PER_PERM],
];

/** A retarder by itself must be of class II or better. [ng/(Pa s m2)] */
export const SEPARATE_RETARDER_NG = NG_PER_PERM;

/** 'I', 'II', 'III', or null above class III. */
export function vapourClass(permeanceNg) {
  const found = CLASS_LIMITS_NG.find(([, limitNg]) => atMost(permeanceNg, limitNg));
  return found ? found[0] : null;
}

/** True in zones 4C and 5 to 8, where a retarder belongs on the side that is warm in winter. */
export const sheetMustBeInside = (climateZone) => climateZone === "4C" || "5678".includes(climateZone[0]);
