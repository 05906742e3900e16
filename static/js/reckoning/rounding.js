/** The one rounding: half up, away from zero, on the shortest decimal that stands for a number. */

import { MM_PER_INCH } from "./units.js";

/** A finite number as plain digits, without exponent. */
function plainDigits(value) {
  const text = String(Math.abs(value));
  const [mantissa, exponent] = text.split("e");
  if (exponent === undefined) return text;
  const [whole, part = ""] = mantissa.split(".");
  const shift = Number(exponent);
  if (shift < 0) return `0.${"0".repeat(-shift - 1)}${whole}${part}`;
  return part.length > shift
    ? `${whole}${part.slice(0, shift)}.${part.slice(shift)}`
    : `${whole}${part}${"0".repeat(shift - part.length)}`;
}

/** Round half up to a number of decimal places; a text of exactly so many.
 * @param {number} value finite
 * @param {number} [places] 0 to 9
 */
export function halfUp(value, places = 0) {
  if (!Number.isFinite(value)) throw new RangeError(`only finite numbers can be rounded, found ${value}`);
  const [whole, part = ""] = plainDigits(value).split(".");
  const kept = BigInt(whole + part.padEnd(places, "0").slice(0, places));
  const up = part.length > places && part[places] >= "5" ? 1n : 0n;
  const digits = (kept + up).toString().padStart(places + 1, "0");
  const text = places ? `${digits.slice(0, -places)}.${digits.slice(-places)}` : digits;
  return value < 0 && /[1-9]/.test(text) ? `-${text}` : text;
}

/** A length in whole sixteenths of an inch, half up. */
export function sixteenths(depthMm) {
  return Number(halfUp(Number(halfUp((depthMm / MM_PER_INCH) * 16.0, 9))));
}
