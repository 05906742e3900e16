/** One record: its envelope, its order among others, and why it may be refused; see fieldapp/records/record.py. */

import { canonical } from "./canonical.js";
import { fields, instant, isObject, pattern, shown, text, whole } from "./fields.js";
import { UUID, checkBody, kindOf } from "./kinds.js";

const id = pattern(UUID, "a UUID in lower case");

const envelope = fields(
  { id, job: id, kind: text(1, 60), at: instant(), by: text(1, 200), device: text(1, 200) },
  { n: whole(1), clock: text() },
);

/** True where a record describes a thing; all others, unknown kinds too, are facts. */
export const describes = (record) => kindOf(record.kind)?.describes === true;

/** Records stand in order of (at, id). */
export const inOrder = (a, b) => (a.at !== b.at ? (a.at < b.at ? -1 : 1) : a.id < b.id ? -1 : a.id > b.id ? 1 : 0);

/** {record} for a JSON value that is one, else {refusal}. The value is not changed. */
export function readRecord(value) {
  if (!isObject(value)) {
    const allowed = "an object with id, job, kind, at, by, device and body";
    return { refusal: { id: "", field: "record", found: shown(value), allowed } };
  }
  const foundId = typeof value.id === "string" ? value.id : "";
  const problem = envelope(value, "") ?? checkBody(value.kind, value.body);
  if (problem === null && value.kind === "job" && value.body.key !== value.job) {
    const allowed = `the job's own id, ${value.job}`;
    return { refusal: { id: foundId, field: "key", found: shown(value.body.key), allowed } };
  }
  if (problem !== null) return { refusal: { id: shown(foundId), ...problem } };
  try {
    return { record: { ...pick(value), raw: value, canonical: canonical(value) } };
  } catch (error) {
    const allowed = "values that have a canonical JSON form (RFC 8785)";
    return { refusal: { id: foundId, field: "record", found: shown(String(error.message)), allowed } };
  }
}

const pick = ({ id, job, kind, at, by, device, body }) => ({ id, job, kind, at, by, device, body });
