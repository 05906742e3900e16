/** Quantities and results as people read them; the same texts as fieldapp/reckoning/wording.py makes. */

import { atLeast, atMost, depthMeets, depthOver } from "./limits.js";
import { halfUp, sixteenths } from "./rounding.js";
import { KG_M3_PER_PCF, KG_PER_LB, M2_PER_FT2, M3_PER_BOARD_FOOT, NG_PER_PERM, RSI_PER_R } from "./units.js";

/** The word of a check's result, where it is not the result's own name. */
export const SHORT_WORDS = { "over-depth": "too deep", deficiencies: "open" };

/** Digits in groups of three: '1,204'. */
const grouped = (digits) => {
  const [whole, part] = digits.split(".");
  const marked = whole.replace(/\B(?=(\d{3})+(?!\d))/g, ",");
  return part === undefined ? marked : `${marked}.${part}`;
};

/** '1 bay', '9 bays', '1,204 points'. */
export const count = (number, noun, plural) =>
  `${grouped(String(number))} ${number === 1 ? noun : (plural ?? `${noun}s`)}`;

/** 'a', 'a and b', 'a, b and c'. */
export const listed = (items) =>
  items.length === 1 ? items[0] : `${items.slice(0, -1).join(", ")} and ${items[items.length - 1]}`;

/** Bays by name, runs of three and more drawn together: 'bays 9 to 14, 16 and 20 to 22'. */
export function bayList(labels, inOrder) {
  const wanted = new Set(labels);
  const runs = [];
  let before = false;
  for (const label of inOrder) {
    const now = wanted.has(label);
    if (now && before) runs[runs.length - 1].push(label);
    else if (now) runs.push([label]);
    before = now;
  }
  const parts = runs.flatMap((run) => (run.length > 2 ? [`${run[0]} to ${run[run.length - 1]}`] : run));
  return parts.length ? `${wanted.size === 1 ? "bay" : "bays"} ${listed(parts)}` : "no bay";
}

/** Whole from 10 upwards, one decimal below. */
const twoFigures = (value) => (Number(halfUp(value)) >= 10 ? halfUp(value) : halfUp(value, 1));

/** Writes quantities in the units of a job, 'ip' or 'si'. */
export class Wording {
  constructor(units) {
    this.units = units;
    this.isIp = units === "ip";
    this.vapor = this.isIp ? "vapor" : "vapour";
    this.depthUnit = this.isIp ? "in" : "mm";
  }

  /** '2 7/8' (to sixteenths of an inch) or '73'. */
  depthNumber(depthMm) {
    if (!this.isIp) return halfUp(depthMm);
    const steps = sixteenths(depthMm);
    const sign = steps < 0 ? "-" : "";
    const whole = Math.floor(Math.abs(steps) / 16);
    let part = Math.abs(steps) % 16;
    if (part === 0) return `${sign}${whole}`;
    let below = 16;
    while (part % 2 === 0) {
      part /= 2;
      below /= 2;
    }
    return whole ? `${sign}${whole} ${part}/${below}` : `${sign}${part}/${below}`;
  }

  /** '2 7/8 in' or '73 mm'. */
  depth(depthMm) {
    return `${this.depthNumber(depthMm)} ${this.depthUnit}`;
  }

  /** Never written equal to a least depth that it misses. */
  depthHeld(depthMm, limitMm) {
    const text = this.depth(depthMm);
    return !depthMeets(depthMm, limitMm) && text === this.depth(limitMm) ? `just under ${text}` : text;
  }

  /** Never written equal to a greatest depth that it passes. */
  depthHeldBelow(depthMm, limitMm) {
    const text = this.depth(depthMm);
    return depthOver(depthMm, limitMm) && text === this.depth(limitMm) ? `just over ${text}` : text;
  }

  /** 'R-23.1' or 'RSI 4.07'. */
  r(rsi) {
    return this.isIp ? `R-${halfUp(rsi / RSI_PER_R, 1)}` : `RSI ${halfUp(rsi, 2)}`;
  }

  rHeld(rsi, limitRsi) {
    const text = this.r(rsi);
    return !atLeast(rsi, limitRsi) && text === this.r(limitRsi) ? `just under ${text}` : text;
  }

  /** '412 ft²' or '38.3 m²'. */
  area(areaM2) {
    return this.isIp ? `${grouped(halfUp(areaM2 / M2_PER_FT2))} ft²` : `${grouped(halfUp(areaM2, 1))} m²`;
  }

  /** '38 board feet' or '90 litres'. */
  foam(volumeM3) {
    const value = this.isIp ? volumeM3 / M3_PER_BOARD_FOOT : volumeM3 * 1000.0;
    const noun = this.isIp ? "board feet" : "litres";
    return value > 0.0 && value < 0.05 ? `under 0.1 ${noun}` : `${grouped(twoFigures(value))} ${noun}`;
  }

  /** '0.87 perm' or '50.0 ng/(Pa s m²)'. */
  permeance(permeanceNg) {
    return this.isIp ? `${halfUp(permeanceNg / NG_PER_PERM, 2)} perm` : `${halfUp(permeanceNg, 1)} ng/(Pa s m²)`;
  }

  permeanceHeld(permeanceNg, limitNg) {
    const text = this.permeance(permeanceNg);
    return !atMost(permeanceNg, limitNg) && text === this.permeance(limitNg) ? `just over ${text}` : text;
  }

  /** '2.10 pcf' or '33.7 kg/m³'. */
  density(kgM3) {
    return this.isIp ? `${halfUp(kgM3 / KG_M3_PER_PCF, 2)} pcf` : `${halfUp(kgM3, 1)} kg/m³`;
  }

  densityHeld(kgM3, low, high) {
    const text = this.density(kgM3);
    if (low != null && !atLeast(kgM3, low) && text === this.density(low)) return `just under ${text}`;
    if (high != null && !atMost(kgM3, high) && text === this.density(high)) return `just over ${text}`;
    return text;
  }

  /** '12 lb' or '5.4 kg'. */
  mass(massKg) {
    return this.isIp ? `${twoFigures(massKg / KG_PER_LB)} lb` : `${twoFigures(massKg)} kg`;
  }

  /** '8 %'; what is more than nothing is never written as nothing, nor less than all as all. */
  percent(share) {
    if (share > 0.0 && share < 0.005) return "under 1 %";
    if (share >= 0.995 && share < 1.0) return "over 99 %";
    return `${halfUp(share * 100.0)} %`;
  }

  /** A share held against a greatest one; near nothing and near all, to more places. */
  percentHeld(share, limit) {
    const text = this.percent(share);
    if (atMost(share, limit) || text !== this.percent(limit)) return text;
    if (/^\d/.test(text)) return `just over ${text}`;
    let places = 1;
    while (places < 6 && halfUp(share * 100.0, places) === halfUp(limit * 100.0, places)) places += 1;
    return `${halfUp(share * 100.0, places)} %`;
  }
}
