/**
 * Specific heat of carbon steel, J/(kg·K), T in °C, 20–1200 °C.
 * Source: EN 1993-1-2:2005, 3.4.1.2 (read in a secondary copy). The peak at 735 °C is the standard's
 * stand-in for the transformation heat. Example: 400 °C → 605.9.
 */
export function carbonSteelSpecificHeat(temperatureC: number): number {
  const t = Math.min(1200, Math.max(20, temperatureC));
  if (t < 600) return 425 + 7.73e-1 * t - 1.69e-3 * t * t + 2.22e-6 * t * t * t;
  if (t < 735) return 666 + 13002 / (738 - t);
  if (t < 900) return 545 + 17820 / (t - 731);
  return 650;
}

/** Conductivity of carbon steel, W/(m·K), 20–1200 °C. Source: EN 1993-1-2:2005, 3.4.1.3. 20 °C → 53.3. */
export function carbonSteelConductivity(temperatureC: number): number {
  const t = Math.min(1200, Math.max(20, temperatureC));
  return t < 800 ? 54 - 3.33e-2 * t : 27.3;
}

/** Specific heat of stainless steel, J/(kg·K), 20–1200 °C. Source: EN 1993-1-2:2005, Annex C. 20 °C → 455.5. */
export function stainlessSpecificHeat(temperatureC: number): number {
  const t = Math.min(1200, Math.max(20, temperatureC));
  return 450 + 0.28 * t - 2.91e-4 * t * t + 1.34e-7 * t * t * t;
}

/** Conductivity of stainless steel, W/(m·K), 20–1200 °C. Source: EN 1993-1-2:2005, Annex C. 20 °C → 14.85. */
export function stainlessConductivity(temperatureC: number): number {
  const t = Math.min(1200, Math.max(20, temperatureC));
  return 14.6 + 1.27e-2 * t;
}

/**
 * Resistivity of AISI 304, Ω·m, 24–756 °C: 1.575e-15 T³ − 3.236e-12 T² + 2.724e-9 T + 1.364e-7, T in K.
 * Source: after Cincotti et al. 2007 (read in a secondary copy). Above 756 °C the cubic turns up far
 * too steeply, so it continues with a slope from memory of 1.6e-10 Ω·m/K. Example: 25 °C → 70.26e-8.
 */
export function stainless304Resistivity(temperatureC: number): number {
  const top = 1029;
  const k = Math.min(top, Math.max(250, temperatureC + 273.15));
  const value = ((1.575e-15 * k - 3.236e-12) * k + 2.724e-9) * k + 1.364e-7;
  return value + Math.max(0, temperatureC + 273.15 - top) * 1.6e-10;
}

/**
 * Resistivity of one graphite grade (AT101), Ω·m, 19–1601 °C; other grades differ by up to a factor 2.
 * Source: after Cincotti et al. 2007 (secondary copy), T in K. Example: 25 °C → 1.3707e-5.
 */
export function graphiteResistivity(temperatureC: number): number {
  const k = Math.min(1874, Math.max(292, temperatureC + 273.15));
  return ((-2.705e-15 * k + 1.263e-11) * k - 1.836e-8) * k + 1.813e-5;
}
