/** Canonical JSON (RFC 8785): names sorted by UTF-16 units, no spaces, numbers as ECMAScript writes them. */

/** @throws {RangeError} where a value has no canonical form (numbers that are not finite, lone surrogates) */
export function canonical(value) {
  if (Array.isArray(value)) return `[${value.map(canonical).join(",")}]`;
  if (typeof value === "object" && value !== null) {
    const members = Object.keys(value)
      .sort((a, b) => (a < b ? -1 : 1))
      .map((name) => `${canonical(name)}:${canonical(value[name])}`);
    return `{${members.join(",")}}`;
  }
  if (typeof value === "number" && !Number.isFinite(value)) throw new RangeError(`${value} is no JSON number`);
  if (typeof value === "string" && !value.isWellFormed()) throw new RangeError("text with a lone surrogate");
  return JSON.stringify(value);
}
