/** What became of each deficiency: open, repaired, accepted; see fieldapp/records/repairs.py. */

/** All deficiencies that stand, in order, each with its repairs and acceptances. Only an inspector closes one. */
export function deficiencyHistories(job) {
  return (job.facts.deficiency ?? []).map((deficiency) => {
    const repairs = (job.facts.repair ?? []).filter((record) => record.body.deficiency === deficiency.id);
    const mended = new Set(repairs.map((record) => record.id));
    const acceptances = (job.facts.acceptance ?? []).filter(
      (record) => mended.has(record.body.repair) && record.body.role === "inspector",
    );
    const state = acceptances.length ? "accepted" : repairs.length ? "repaired" : "open";
    return { deficiency, repairs, acceptances, state };
  });
}
