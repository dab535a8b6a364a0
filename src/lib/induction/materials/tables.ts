/** A function of temperature in °C. */
export type OfTemperature = (temperatureC: number) => number;

/** Constant over temperature. */
export function constant(value: number): OfTemperature {
  return () => value;
}

/** Straight lines between [°C, value] points (ascending), held at the end values outside. */
export function interpolated(points: readonly (readonly [number, number])[]): OfTemperature {
  return (t) => {
    const first = points[0];
    if (first === undefined) return Number.NaN;
    let previous = first;
    if (t <= first[0]) return first[1];
    for (const point of points) {
      if (t <= point[0]) {
        const span = point[0] - previous[0];
        return span === 0 ? point[1] : previous[1] + ((point[1] - previous[1]) * (t - previous[0])) / span;
      }
      previous = point;
    }
    return previous[1];
  };
}

const LOW = -60;
const HIGH = 3400;

/**
 * Enthalpy above 20 °C, J/kg, as the integral of a specific heat: cells of 1 K, 3-point Gauss–Legendre
 * in each, straight between the cell ends (so that its slope is a bounded, positive mean specific
 * heat). Built at the first call. Temperatures outside −60…3400 °C continue with the end cell's slope.
 */
export function enthalpyOf(specificHeat: OfTemperature): OfTemperature {
  let table: Float64Array | null = null;
  const build = (): Float64Array => {
    const h = new Float64Array(HIGH - LOW + 1);
    const g = 0.5 * Math.sqrt(0.6);
    for (let k = 0; k < HIGH - LOW; k++) {
      const mid = LOW + k + 0.5;
      const mean = (5 * specificHeat(mid - g) + 8 * specificHeat(mid) + 5 * specificHeat(mid + g)) / 18;
      h[k + 1] = (h[k] ?? 0) + mean;
    }
    const zero = h[20 - LOW] ?? 0;
    for (let k = 0; k < h.length; k++) h[k] = (h[k] ?? 0) - zero;
    return h;
  };
  return (t) => {
    table ??= build();
    const k = Math.min(HIGH - LOW - 1, Math.max(0, Math.floor(t) - LOW));
    const low = table[k] ?? 0;
    return low + ((table[k + 1] ?? 0) - low) * (t - (LOW + k));
  };
}
