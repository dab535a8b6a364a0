/**
 * Drive of a centre-tapped self-resonant push-pull stage fed through a choke.
 *
 * The mean voltage over the choke is zero, so the centre tap, a rectified half sine of the half-winding voltage, has
 * the mean Vdc: peak at the tap (π/2)·Vdc, peak over the whole coil and over an open device π·Vdc.
 * Source: volt-second balance (any text on current-fed parallel resonant inverters).
 */

/** Peak voltage end to end and over a device, V. */
export const pushPullPeakVoltage = (dcVoltage: number): number => Math.PI * dcVoltage;

/** Tank voltage end to end, V rms. */
export const pushPullTankVoltage = (dcVoltage: number): number => (Math.PI / Math.SQRT2) * dcVoltage;

/** Power drawn with the tank's parallel resistance Rp (V² / Rp), W. */
export const pushPullPower = (dcVoltage: number, parallelResistance: number): number =>
  pushPullTankVoltage(dcVoltage) ** 2 / parallelResistance;

/**
 * Share of Vdc/(ωL) that the choke current swings peak to peak: the voltage over it is
 * Vdc·(1 − (π/2)|sin θ|), positive for |θ| < arcsin(2/π).
 */
const ripple = (() => {
  const edge = Math.asin(2 / Math.PI);
  return 2 * (edge - (Math.PI / 2) * (1 - Math.cos(edge)));
})();

export interface ChokeLoad {
  /** Mean current from the DC supply, A. */
  mean: number;
  /** Peak-to-peak ripple at twice the resonance, A. */
  ripplePeakToPeak: number;
  /** mean + half the ripple, A. */
  peak: number;
}

/**
 * Current in the feeding choke.
 *
 * @param power W from the DC supply
 * @param frequency resonance, Hz
 * @param inductance of the choke, H; null: no ripple figure, peak = mean
 */
export function chokeLoad(
  power: number,
  dcVoltage: number,
  frequency: number,
  inductance: number | null,
): ChokeLoad {
  const mean = power / dcVoltage;
  const swing = inductance === null ? 0 : (ripple * dcVoltage) / (2 * Math.PI * frequency * inductance);
  return { mean, ripplePeakToPeak: swing, peak: mean + swing / 2 };
}
