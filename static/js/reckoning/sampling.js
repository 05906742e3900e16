/** What a sample supports; methods and sources in fieldapp/reckoning/sampling.py. */

export const CONFIDENCE = 0.95;

/** P(T <= t) of Student's t for t >= 0 and whole degrees of freedom (Abramowitz and Stegun 26.7.3-4). */
export function tProbability(t, degrees) {
  const theta = Math.atan(t / Math.sqrt(degrees));
  const cos2 = Math.cos(theta) ** 2;
  const odd = degrees % 2 === 1;
  let term = odd ? Math.cos(theta) : 1.0;
  let series = 0.0;
  for (let k = odd ? 1 : 0; k < degrees - 1; k += 2) {
    series += term;
    term *= (cos2 * (k + 1)) / (k + 2);
  }
  const both = odd ? ((theta + Math.sin(theta) * series) * 2.0) / Math.PI : Math.sin(theta) * series;
  return 0.5 + both / 2.0;
}

/** t with P(T <= t) = probability (0.5 to less than 1), by bisection. */
export function tQuantile(probability, degrees) {
  if (!(probability >= 0.5 && probability < 1.0) || degrees < 1) {
    throw new RangeError(`probability 0.5 to 1 and at least 1 degree of freedom, found ${probability}, ${degrees}`);
  }
  let low = 0.0;
  let high = 1.0;
  while (tProbability(high, degrees) < probability) high *= 2.0;
  for (let i = 0; i < 48; i += 1) {
    const middle = (low + high) / 2.0;
    if (tProbability(middle, degrees) < probability) low = middle;
    else high = middle;
  }
  return (low + high) / 2.0;
}

/** Between-bay and within-bay variance of the mean of [{areaM2, meanMm, varianceMm2, points}]. [mm2] */
export function clusterVariance(bays, baysTotal) {
  const n = bays.length;
  let area = 0.0;
  let weighted = 0.0;
  for (const bay of bays) {
    area += bay.areaM2;
    weighted += bay.areaM2 * bay.meanMm;
  }
  const meanArea = area / n;
  const meanMm = weighted / area;
  let squares = 0.0;
  let within = 0.0;
  for (const bay of bays) {
    const weight = bay.areaM2 / meanArea;
    squares += (weight * (bay.meanMm - meanMm)) ** 2;
    if (bay.varianceMm2 !== null) within += (weight * weight * bay.varianceMm2) / bay.points;
  }
  const readShare = n / baysTotal;
  return [((1.0 - readShare) * squares) / (n - 1) / n, (readShare * within) / (n * n)];
}

/** One-sided 95 % lower bound of a surface's mean depth; null where it cannot be given. [mm] */
export function meanLowerBoundMm(bays, baysTotal) {
  const n = bays.length;
  if (n < 2 || (n >= baysTotal && bays.some((bay) => bay.varianceMm2 === null))) return null;
  const [between, within] = clusterVariance(bays, baysTotal);
  let area = 0.0;
  let weighted = 0.0;
  for (const bay of bays) {
    area += bay.areaM2;
    weighted += bay.areaM2 * bay.meanMm;
  }
  return weighted / area - tQuantile(CONFIDENCE, n - 1) * Math.sqrt(between + within);
}

/** n over k, exact. */
function choose(n, k) {
  if (k < 0 || k > n) return 0n;
  let ways = 1n;
  for (let i = 1; i <= Math.min(k, n - k); i += 1) ways = (ways * BigInt(n - i + 1)) / BigInt(i);
  return ways;
}

/** The most bays that can still be short when so many of a random sample were (95 %, one-sided, exact). */
export function shortBaysAtMost(baysTotal, baysRead, baysShort) {
  if (!(baysShort >= 0 && baysShort <= baysRead && baysRead <= baysTotal)) {
    throw new RangeError(`needs 0 <= short <= read <= total, found ${baysShort}, ${baysRead}, ${baysTotal}`);
  }
  const inAll = choose(baysTotal, baysRead);
  const stillPossible = (shortInAll) => {
    const good = baysTotal - shortInAll;
    let found = Math.max(0, baysRead - good);
    let term = choose(shortInAll, found) * choose(good, baysRead - found);
    let ways = term;
    while (found < Math.min(baysShort, shortInAll)) {
      term =
        (term * BigInt(shortInAll - found) * BigInt(baysRead - found)) /
        (BigInt(found + 1) * BigInt(good - baysRead + found + 1));
      found += 1;
      ways += term;
    }
    return 20n * ways > inAll;
  };
  let low = baysShort;
  let high = baysTotal - (baysRead - baysShort);
  while (low < high) {
    const middle = Math.floor((low + high + 1) / 2);
    if (stillPossible(middle)) low = middle;
    else high = middle - 1;
  }
  return low;
}

/** Bias and limits of agreement of differences; null under two pairs. [mm] */
export function limitsOfAgreement(differencesMm) {
  const pairs = differencesMm.length;
  if (pairs < 2) return null;
  let total = 0.0;
  for (const difference of differencesMm) total += difference;
  const bias = total / pairs;
  let squares = 0.0;
  for (const difference of differencesMm) squares += (difference - bias) ** 2;
  const sd = Math.sqrt(squares / (pairs - 1));
  return { pairs, bias_mm: bias, sd_mm: sd, lower_mm: bias - 1.96 * sd, upper_mm: bias + 1.96 * sd };
}
