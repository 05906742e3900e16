/** The digest that a signature covers; see fieldapp/records/digest.py. */

import { describes } from "./record.js";

/** SHA-256, in hex, of the records without signatures, sorted by id. Needs a secure context (crypto.subtle). */
export async function covers(records) {
  const spokenOf = records
    .filter((record) => record.kind !== "signature")
    .sort((a, b) => (a.id < b.id ? -1 : a.id > b.id ? 1 : 0));
  const content = new TextEncoder().encode(`[${spokenOf.map((record) => record.canonical).join(",")}]`);
  const hash = new Uint8Array(await crypto.subtle.digest("SHA-256", content));
  return Array.from(hash, (byte) => byte.toString(16).padStart(2, "0")).join("");
}

/** Keys and ids of everything that a fact is about. */
export function spokenOfBy(record) {
  const { body } = record;
  const single = ["bay", "surface", "about", "record", "deficiency", "repair"].map((name) => body[name]);
  return [...single.filter((key) => typeof key === "string"), ...(body.bays ?? []), ...(body.surfaces ?? [])];
}

/** The records that a signature for named surfaces speaks of. */
export function aboutSurfaces(records, surfaceKeys) {
  const all = records.filter((record) => record.kind !== "signature");
  const wanted = new Set(surfaceKeys);
  const things = new Set(wanted);
  for (const record of all) {
    if (record.kind === "surface" && wanted.has(record.body.key)) {
      for (const key of [record.body.foam, record.body.place]) if (key) things.add(key);
    } else if (record.kind === "bay" && wanted.has(record.body.surface)) {
      things.add(record.body.key);
    }
  }
  const taken = all.filter(
    (record) => record.kind === "job" || (describes(record) && things.has(record.body.key)),
  );
  for (const record of taken) things.add(record.body.key);
  let facts = all.filter((record) => !describes(record));
  for (;;) {
    const more = facts.filter((record) => spokenOfBy(record).some((key) => things.has(key)));
    if (!more.length) return taken;
    taken.push(...more);
    for (const record of more) things.add(record.id);
    const drawn = new Set(more.map((record) => record.id));
    facts = facts.filter((record) => !drawn.has(record.id));
  }
}
