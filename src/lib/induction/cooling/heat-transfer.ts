/** Heat transfer from tube wall to water: Nusselt numbers Nu = h·d/k. */

/** Dittus–Boelter, heating: 0.023·Re^0.8·Pr^0.4; Re > 10⁴. */
export const dittusBoelter = (reynolds: number, prandtl: number): number =>
  0.023 * reynolds ** 0.8 * prandtl ** 0.4;

/**
 * Gnielinski 1976: (f/8)(Re − 1000)Pr/(1 + 12.7·√(f/8)(Pr^⅔ − 1)); 3000 < Re < 5·10⁶.
 * @param friction Darcy factor
 */
export function gnielinski(reynolds: number, prandtl: number, friction: number): number {
  const f8 = friction / 8;
  return (f8 * (reynolds - 1000) * prandtl) / (1 + 12.7 * Math.sqrt(f8) * (prandtl ** (2 / 3) - 1));
}

/**
 * Laminar flow in a coiled tube: 3.65 + 0.08·(1 + 0.8·(d/D)^0.9)·Re^m·Pr^⅓, m = 0.5 + 0.2903·(d/D)^0.194.
 * Source: Schmidt 1967, from memory; ±20 %.
 */
export function schmidtLaminar(reynolds: number, prandtl: number, tubeOverCoil: number): number {
  const m = 0.5 + 0.2903 * tubeOverCoil ** 0.194;
  return 3.65 + 0.08 * (1 + 0.8 * tubeOverCoil ** 0.9) * reynolds ** m * Math.cbrt(prandtl);
}

/**
 * Nusselt number of a coiled tube: Schmidt in laminar, Gnielinski with the coil's friction in turbulent flow.
 */
export function coiledNusselt(
  flow: { reynolds: number; prandtl: number; friction: number; regime: 'laminar' | 'turbulent' },
  tubeOverCoil: number,
): number {
  if (flow.regime === 'laminar')
    return tubeOverCoil > 0 ? schmidtLaminar(flow.reynolds, flow.prandtl, tubeOverCoil) : 4.36;
  return gnielinski(Math.max(flow.reynolds, 3000), flow.prandtl, flow.friction);
}
