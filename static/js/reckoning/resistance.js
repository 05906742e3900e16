/** Thermal resistance from depth and through framing; formulas and sources in fieldapp/reckoning/resistance.py. */

import { DEPTH_TOLERANCE_MM, depthMeets, depthOver } from "./limits.js";
import { MM_PER_INCH, RSI_PER_R } from "./units.js";

/** A foam whose resistance is in proportion to its depth. */
export class PerMetre {
  constructor(rsiPerM) {
    this.rsiPerM = rsiPerM;
  }

  /** [m2K/W] */
  rsi(depthMm) {
    return (this.rsiPerM * depthMm) / 1000.0;
  }

  beyondTested() {
    return false;
  }
}

/** A foam whose maker gives resistances at tested depths: rows of [depth_mm, rsi], depths rising. */
export class Table {
  constructor(rows) {
    this.rows = rows;
  }

  /** Straight lines between the rows; the nearest row's own R per depth outside them. [m2K/W] */
  rsi(depthMm) {
    let [lowDepth, lowRsi] = this.rows[0];
    if (depthMm <= lowDepth) return (lowRsi / lowDepth) * depthMm;
    for (const [highDepth, highRsi] of this.rows.slice(1)) {
      if (depthMm <= highDepth) {
        return lowRsi + ((highRsi - lowRsi) * (depthMm - lowDepth)) / (highDepth - lowDepth);
      }
      lowDepth = highDepth;
      lowRsi = highRsi;
    }
    return (lowRsi / lowDepth) * depthMm;
  }

  /** True where a depth of foam lies outside the tested depths; a bare point claims nothing. */
  beyondTested(depthMm) {
    if (depthMm <= DEPTH_TOLERANCE_MM) return false;
    return !depthMeets(depthMm, this.rows[0][0]) || depthOver(depthMm, this.rows[this.rows.length - 1][0]);
  }
}

/** Surface films (inside, outside) by assembly. [m2K/W] */
export const FILMS_RSI = {
  wall: [0.12, 0.03],
  rim: [0.12, 0.03],
  foundation: [0.12, 0.03],
  "sloped-roof": [0.107, 0.03],
  "attic-floor": [0.107, 0.03],
  floor: [0.162, 0.03],
};

/** Both surface films of an assembly; given ones go before the usual ones. [m2K/W] */
export function filmsRsi(assembly, insideRsi, outsideRsi) {
  const [inside, outside] = FILMS_RSI[assembly];
  return (insideRsi ?? inside) + (outsideRsi ?? outside);
}

/** Softwood along the path of heat. [m2K/W per m] */
export const WOOD_RSI_PER_M = 8.67;

/** U of foam between wood framing, by parallel paths. [W/(m2K)] */
export function woodFrameU(clearU, framingShare, framingDepthMm, seriesRsi) {
  const framingRsi = (WOOD_RSI_PER_M * framingDepthMm) / 1000.0;
  return (1.0 - framingShare) * clearU + framingShare / (seriesRsi + framingRsi);
}

/** Effective R of insulated steel-stud cavities: [depth in, spacing in, rows of [cavity R, effective R]]. */
export const STEEL_EFFECTIVE_R = [
  [3.5, 16.0, [[11.0, 5.5], [13.0, 6.0], [15.0, 6.4]]],
  [3.5, 24.0, [[11.0, 6.6], [13.0, 7.2], [15.0, 7.8]]],
  [6.0, 16.0, [[19.0, 7.1], [21.0, 7.4]]],
  [6.0, 24.0, [[19.0, 8.6], [21.0, 9.0]]],
  [8.0, 16.0, [[25.0, 7.8]]],
  [8.0, 24.0, [[25.0, 9.6]]],
];

/** Effective resistance of a cavity between steel studs; null outside the published table. [m2K/W] */
export function steelFrameRsi(cavityRsi, framingDepthMm, spacingMm) {
  const cavityR = cavityRsi / RSI_PER_R;
  for (const [depthIn, spacingIn, rows] of STEEL_EFFECTIVE_R) {
    if (Math.abs(framingDepthMm - depthIn * MM_PER_INCH) > 2.0) continue;
    if (Math.abs(spacingMm - spacingIn * MM_PER_INCH) > 2.0) continue;
    const pairs = rows.length > 1 ? rows.slice(1).map((high, i) => [rows[i], high]) : [[rows[0], rows[0]]];
    for (const [[lowR, lowEffective], [highR, highEffective]] of pairs) {
      if (lowR - 1e-6 <= cavityR && cavityR <= highR + 1e-6) {
        const share = highR > lowR ? (cavityR - lowR) / (highR - lowR) : 0.0;
        return (lowEffective + (highEffective - lowEffective) * share) * RSI_PER_R;
      }
    }
  }
  return null;
}
