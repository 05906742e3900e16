/** Shares of a bay's area that go with the points of its grid. */

/** Shares of a length for points along it: equal, or strips that reach half way to the next point. */
export function stripShares(atMm, count, lengthMm) {
  if (atMm == null) return Array(count).fill(1.0 / count);
  const bounds = [0.0];
  for (let i = 1; i < atMm.length; i += 1) bounds.push((atMm[i - 1] + atMm[i]) / 2.0);
  bounds.push(lengthMm);
  return bounds.slice(1).map((end, i) => (end - bounds[i]) / lengthMm);
}

/** Areas of the points of a bay, row by row from the top, left to right. [m2] */
export const pointAreasM2 = (areaM2, rowShares, colShares) =>
  rowShares.flatMap((row) => colShares.map((col) => areaM2 * row * col));
