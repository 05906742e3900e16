/** Rules for single fields, in the words of fieldapp/records/fields.py.
 *
 * A rule returns null for a good value, else a problem {field, found, allowed}.
 */

import { canonical } from "./canonical.js";

export const LONGEST_FOUND = 80;
export const LARGEST_WHOLE = Number.MAX_SAFE_INTEGER;

/** Everything that could end a line, and other characters that no screen should see. */
const BREAKS = /[\x00-\x1f\x7f-\x9f\u2028\u2029]+/g;

const problem = (field, found, allowed) => ({ field, found, allowed });

/** A found value as text, cut to a readable length. */
export function shown(value) {
  const text = (typeof value === "string" ? value : canonical(value))
    .toWellFormed()
    .replaceAll("\ufffd", "?")
    .replace(BREAKS, " ");
  const letters = Array.from(text);
  return letters.length <= LONGEST_FOUND ? text : `${letters.slice(0, LONGEST_FOUND - 1).join("")}…`;
}

/** A bound as people write it. */
export const plain = (number) => String(number);

/** True for a plain JSON object. */
export const isObject = (value) => typeof value === "object" && value !== null && !Array.isArray(value);

/** A finite number within bounds; `above` leaves the lower bound itself out, `below` the upper. */
export function number({ low = null, high = null, above = false, below = false } = {}) {
  let allowed = "a number";
  if (high !== null) allowed = `${above ? "over " : ""}${plain(low ?? 0)} to ${below ? "under " : ""}${plain(high)}`;
  else if (low !== null) allowed = `a number ${above ? "over" : "of at least"} ${plain(low)}`;
  return (value, name) => {
    if (typeof value === "number" && Math.abs(value) <= LARGEST_WHOLE) {
      const overLow = low === null || (above ? value > low : value >= low);
      const underHigh = high === null || (below ? value < high : value <= high);
      if (overLow && underHigh) return null;
    }
    return problem(name, shown(value), allowed);
  };
}

/** A whole number within bounds. */
export const whole =
  (low, high = LARGEST_WHOLE) =>
  (value, name) => {
    if (typeof value === "number" && Number.isInteger(value) && low <= value && value <= high) return null;
    const top = high !== LARGEST_WHOLE ? ` to ${high}` : " or more";
    return problem(name, shown(value), `a whole number, ${low}${top}`);
  };

/** Text of a bounded length; `least` 1 asks for something other than blanks. */
export const text =
  (least = 0, most = 10_000) =>
  (value, name) => {
    if (typeof value !== "string") return problem(name, shown(value), "text");
    if (Array.from(value.trim()).length < least || Array.from(value).length > most) {
      return problem(name, shown(value), `text of ${least} to ${most} characters`);
    }
    if (!value.isWellFormed()) {
      return problem(name, shown(value), "text without lone surrogates");
    }
    return null;
  };

/** One of a list of words. */
export const oneOf =
  (...words) =>
  (value, name) =>
    typeof value === "string" && words.includes(value)
      ? null
      : problem(name, shown(value), `one of ${words.join(", ")}`);

/** Text of one form. */
export const pattern = (form, allowed) => (value, name) =>
  typeof value === "string" && form.test(value) ? null : problem(name, shown(value), allowed);

const INSTANT = /^\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d\.\d{3}Z$/;

/** RFC 3339, UTC, milliseconds: one form only, so that text order is time order. */
export const instant = () => (value, name) => {
  // A date that is in no calendar does not come back as it was written.
  if (typeof value === "string" && INSTANT.test(value) && !value.startsWith("0000")) {
    const time = new Date(value);
    if (!Number.isNaN(time.getTime()) && time.toISOString() === value) return null;
  }
  return problem(name, shown(value), "a UTC time such as 2026-05-04T14:03:11.123Z");
};

/** true or false. */
export const flag = () => (value, name) =>
  typeof value === "boolean" ? null : problem(name, shown(value), "true or false");

/** A list, each item by one rule. */
export const listOf =
  (item, least = 0, most = 100_000) =>
  (value, name) => {
    if (!Array.isArray(value) || value.length < least || value.length > most) {
      return problem(name, shown(value), least ? `a list of at least ${least}` : "a list");
    }
    for (let place = 0; place < value.length; place += 1) {
      const found = item(value[place], `${name}[${place}]`);
      if (found) return found;
    }
    return null;
  };

/** An object: fields that must be there, fields that may be, and what they owe each other. A null field is absent. */
export const fields =
  (must = {}, may = {}, more = () => null) =>
  (value, name) => {
    if (!isObject(value)) return problem(name || "body", shown(value), "an object with named fields");
    const start = name ? `${name}.` : "";
    for (const [key, rule] of Object.entries(must)) {
      if (value[key] == null) return problem(`${start}${key}`, "nothing", rule(null, "").allowed);
      const found = rule(value[key], `${start}${key}`);
      if (found) return found;
    }
    for (const [key, rule] of Object.entries(may)) {
      const found = value[key] == null ? null : rule(value[key], `${start}${key}`);
      if (found) return found;
    }
    const found = more(value);
    return found ? { ...found, field: `${start}${found.field}` } : null;
  };

/** Several fields by one rule. */
export const each = (rule, ...names) => Object.fromEntries(names.map((name) => [name, rule]));
