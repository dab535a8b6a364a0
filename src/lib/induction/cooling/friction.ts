/** Darcy friction factors of straight and coiled smooth tubes. Re = ρ·v·d/µ with the tube's inside diameter d. */

/** Drawn copper, m (common practice). */
export const copperRoughness = 1.5e-6;

/** Reynolds number at which the flow in a straight tube turns turbulent (common practice). */
const straightCritical = 2300;

/** Colebrook: 1/√f = −2·log10(ε/(3.7·d) + 2.51/(Re·√f)); solved to 1e-13. Turbulent, Re > 4000. */
export function colebrook(reynolds: number, relativeRoughness: number): number {
  let x = 1 / Math.sqrt(0.3164 * reynolds ** -0.25);
  for (let i = 0; i < 100; i++) {
    const next = -2 * Math.log10(relativeRoughness / 3.7 + (2.51 * x) / reynolds);
    if (Math.abs(next - x) < 1e-13 * x) return 1 / next ** 2;
    x = next;
  }
  return 1 / x ** 2;
}

/** Straight tube: 64/Re below 2300, else Colebrook. */
export function straightFriction(reynolds: number, relativeRoughness = 0): number {
  return reynolds < straightCritical ? 64 / reynolds : colebrook(reynolds, relativeRoughness);
}

/**
 * Reynolds number at which the flow in a coil turns turbulent, 20 000·(d/D)^0.32.
 * Source: Ito 1959; stated range 15 < D/d < 860. Tighter coils are outside it.
 */
export const itoCritical = (tubeOverCoil: number): number => 20_000 * tubeOverCoil ** 0.32;

/**
 * Turbulent coiled tube, f = 0.304·Re^−0.25 + 0.029·√(d/D).
 * Source: Ito 1959; range 0.034 < Re·(d/D)² < 300.
 */
export const itoTurbulent = (reynolds: number, tubeOverCoil: number): number =>
  0.304 * reynolds ** -0.25 + 0.029 * Math.sqrt(tubeOverCoil);

/**
 * Turbulent coiled tube after Mori & Nakayama 1967, f = 0.3·√(d/D)·t·(1 + 0.112·t), t = (Re·(d/D)²)^−0.2.
 */
export function moriNakayamaTurbulent(reynolds: number, tubeOverCoil: number): number {
  const t = (reynolds * tubeOverCoil ** 2) ** -0.2;
  return 0.3 * Math.sqrt(tubeOverCoil) * t * (1 + 0.112 * t);
}

/**
 * Laminar coiled tube, f = (64/Re)/(1 − (1 − (11.6/De)^0.45)^(1/0.45)), De = Re·√(d/D) > 11.6; straight below.
 * Source: White 1929.
 */
export function whiteLaminar(reynolds: number, tubeOverCoil: number): number {
  const dean = reynolds * Math.sqrt(tubeOverCoil);
  const straight = 64 / reynolds;
  return dean <= 11.6 ? straight : straight / (1 - (1 - (11.6 / dean) ** 0.45) ** (1 / 0.45));
}

export interface Friction {
  factor: number;
  regime: 'laminar' | 'turbulent';
  /** Half width of the band as a fraction: spread of the published correlations. */
  band: number;
  method: string;
}

/**
 * Friction factor of a coiled smooth tube: White below Ito's critical Reynolds number, Ito above, never below the
 * straight tube's. Published correlations differ by 20 %, and more where the coil is tighter than D/d = 15.
 *
 * @param tubeOverCoil d/D: inside diameter of the tube over the coil's mean diameter; 0 = straight
 */
export function coiledFriction(reynolds: number, tubeOverCoil: number, relativeRoughness = 0): Friction {
  if (tubeOverCoil <= 0) {
    const regime = reynolds < straightCritical ? 'laminar' : 'turbulent';
    return {
      factor: straightFriction(reynolds, relativeRoughness),
      regime,
      band: 0.1,
      method: 'Colebrook, straight tube',
    };
  }
  const critical = Math.max(straightCritical, itoCritical(tubeOverCoil));
  const band = tubeOverCoil > 1 / 15 ? 0.25 : 0.2;
  if (reynolds < critical) {
    return {
      factor: whiteLaminar(reynolds, tubeOverCoil),
      regime: 'laminar',
      band,
      method: 'White 1929, coiled tube, laminar',
    };
  }
  const coiled = Math.max(
    itoTurbulent(reynolds, tubeOverCoil),
    straightFriction(reynolds, relativeRoughness),
  );
  return { factor: coiled, regime: 'turbulent', band, method: 'Ito 1959, coiled tube, turbulent' };
}
