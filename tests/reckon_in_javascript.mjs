// Reckons jobs with the phone's own modules: a JSON list of record values a line in, its result a line out.
import { createInterface } from "node:readline";

import { reckon } from "../static/js/reckoning/job.js";
import { count } from "../static/js/records/counting.js";
import { covers } from "../static/js/records/digest.js";
import { NothingToReckonError, load } from "../static/js/records/load.js";

for await (const line of createInterface({ input: process.stdin })) {
  let answer;
  try {
    const { job, refused } = load(JSON.parse(line));
    const result = reckon(count(job).reckoned);
    answer = { ...result, refused, digest: await covers(job.records) };
  } catch (error) {
    if (!(error instanceof NothingToReckonError)) throw error;
    answer = { nothing: true };
  }
  process.stdout.write(`${JSON.stringify(answer)}\n`);
}
