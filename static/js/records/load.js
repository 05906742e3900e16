/** Records as they lie on the phone or come over the wire: values in; the job, and each refused value with its reason, out. */

import { NoJobError, fold } from "./fold.js";
import { readRecord } from "./record.js";

/** Nothing among the values is a job; the message is one sentence for a person. */
export class NothingToReckonError extends Error {}

/** Read values to {job, refused}; `line` counts from 1. One bad record never costs the others. */
export function load(values) {
  let records = [];
  const refused = [];
  const contents = new Map();
  values.forEach((value, index) => {
    const { record, refusal } = readRecord(value);
    const id = record?.id ?? refusal.id;
    if (!contents.has(id)) contents.set(id, new Set());
    contents.get(id).add(record?.canonical ?? `refused ${JSON.stringify(value)}`);
    if (record) records.push([index + 1, record]);
    else refused.push({ line: index + 1, ...refusal });
  });
  if (!values.length) throw new NothingToReckonError("is empty");
  if (!records.length) throw new NothingToReckonError("holds no record that can be read");
  const jobKey = whichJob(records.map(([, record]) => record));
  const allowed = `the job of this file, ${jobKey}`;
  for (const [line, record] of records) {
    if (record.job !== jobKey) refused.push({ line, id: record.id, field: "job", found: record.job, allowed });
  }
  records = records.filter(([, record]) => record.job === jobKey);
  const clashing = [...contents].filter(([id, different]) => id && different.size > 1).map(([id]) => id);
  let job;
  try {
    job = fold(
      records.map(([, record]) => record),
      clashing,
    );
  } catch (error) {
    if (error instanceof NoJobError) throw new NothingToReckonError(`holds nothing to reckon: ${error.message}`);
    throw error;
  }
  for (const refusal of job.refused) {
    for (const [line, record] of records) if (record.id === refusal.id) refused.push({ line, ...refusal });
  }
  refused.sort((a, b) => a.line - b.line || (a.field < b.field ? -1 : a.field > b.field ? 1 : 0));
  return { job, refused };
}

/** The job that a record of kind 'job' names; by the most records, where several do. */
function whichJob(records) {
  const told = new Set(records.filter((record) => record.kind === "job").map((record) => record.job));
  if (!told.size) throw new NothingToReckonError("holds nothing to reckon: no record of kind 'job' says which job this is");
  const sizes = new Map();
  for (const { job } of records) if (told.has(job)) sizes.set(job, (sizes.get(job) ?? 0) + 1);
  return [...sizes].reduce((a, b) => (b[1] > a[1] || (b[1] === a[1] && b[0] < a[0]) ? b : a))[0];
}
