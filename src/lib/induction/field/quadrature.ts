/** Points and weights of a rule on (−1, 1) or (0, 1). */
export interface Rule {
  x: Float64Array;
  w: Float64Array;
}

const cache = new Map<number, Rule>();

/**
 * Gauss–Legendre rule with n points on (−1, 1), n from 1 to 64: Newton's method on the Legendre
 * recurrence. Error about 1e-15. Source: Abramowitz & Stegun, 25.4.29.
 */
export function gaussLegendre(n: number): Rule {
  const known = cache.get(n);
  if (known !== undefined) return known;
  const x = new Float64Array(n);
  const w = new Float64Array(n);
  for (let i = 0; i < Math.ceil(n / 2); i++) {
    let t = Math.cos((Math.PI * (i + 0.75)) / (n + 0.5));
    let derivative = 1;
    for (let step = 0; step < 100; step++) {
      let p0 = 1;
      let p1 = t;
      for (let k = 2; k <= n; k++) {
        const p2 = ((2 * k - 1) * t * p1 - (k - 1) * p0) / k;
        p0 = p1;
        p1 = p2;
      }
      derivative = (n * (t * p1 - p0)) / (t * t - 1);
      const change = p1 / derivative;
      t -= change;
      if (Math.abs(change) < 1e-16) break;
    }
    const weight = 2 / ((1 - t * t) * derivative * derivative);
    x[i] = -t;
    x[n - 1 - i] = t;
    w[i] = weight;
    w[n - 1 - i] = weight;
  }
  if (n % 2 === 1) x[(n - 1) / 2] = 0;
  const rule = { x, w };
  cache.set(n, rule);
  return rule;
}

const cubicCache = new Map<number, Rule>();

/**
 * Rule on (0, 1) for integrands with a logarithmic or near singularity at 0: Gauss points u, placed at
 * u³ with weight 3u². The exponent is 3 on purpose: higher ones bring points so close to the singular
 * point that the double-layer kernel loses digits.
 */
export function cubicRule(n: number): Rule {
  const known = cubicCache.get(n);
  if (known !== undefined) return known;
  const gauss = gaussLegendre(n);
  const rule = {
    x: gauss.x.map((t) => ((t + 1) / 2) ** 3),
    w: gauss.w.map((weight, i) => (weight / 2) * 3 * (((gauss.x[i] ?? 0) + 1) / 2) ** 2),
  };
  cubicCache.set(n, rule);
  return rule;
}

/** Values of the Lagrange basis on `nodes` at t, written to `out`. */
export function lagrange(nodes: Float64Array, t: number, out: Float64Array): void {
  const n = nodes.length;
  for (let i = 0; i < n; i++) {
    let value = 1;
    const xi = nodes[i] as number;
    for (let j = 0; j < n; j++) {
      if (j !== i) value *= (t - (nodes[j] as number)) / (xi - (nodes[j] as number));
    }
    out[i] = value;
  }
}

/**
 * Break points on [low, high] whose spacing follows a size function: ∫dx/h(x) is divided evenly. Used
 * for panels and grids. At least `least` intervals; symmetric about the middle for symmetric h.
 */
export function equidistributed(
  low: number,
  high: number,
  size: (x: number) => number,
  least: number,
  sharpEnds: readonly number[] = [low, high],
): Float64Array {
  // Sampling is fine near the places where h is small (ends), by a cosine map per stretch.
  const stops = [...new Set([low, ...sharpEnds.filter((s) => s > low && s < high), high])].sort(
    (p, q) => p - q,
  );
  const xs: number[] = [low];
  const sums: number[] = [0];
  const samples = 160;
  let sum = 0;
  for (let k = 0; k + 1 < stops.length; k++) {
    const a = stops[k] as number;
    const b = stops[k + 1] as number;
    let previous = a;
    for (let i = 1; i <= samples; i++) {
      // Smoothly clustered at both ends of the stretch.
      const s = i / samples;
      const x = i === samples ? b : a + (b - a) * s ** 3 * (10 - 15 * s + 6 * s * s);
      const mid = 0.5 * (previous + x);
      sum += (x - previous) / size(mid);
      xs.push(x);
      sums.push(sum);
      previous = x;
    }
  }
  const count = Math.max(least, Math.ceil(sum - 1e-6));
  const breaks = new Float64Array(count + 1);
  breaks[0] = low;
  breaks[count] = high;
  let k = 1;
  for (let i = 1; i < count; i++) {
    const target = (sum * i) / count;
    while (k < sums.length - 1 && (sums[k] as number) < target) k++;
    const s0 = sums[k - 1] as number;
    const s1 = sums[k] as number;
    const x0 = xs[k - 1] as number;
    breaks[i] = x0 + (((xs[k] as number) - x0) * (target - s0)) / (s1 - s0 || 1);
  }
  return breaks;
}
