/**
 * Liquid water near 2 bar, 0 to 100 °C.
 *
 * Table evaluated from IAPWS-95 and the IAPWS transport formulations at 2 bar for 10 to 60 °C (values of the reference
 * set); the rows at 0 and 70 to 100 °C are handbook values of saturated water (from memory, ±0.5 %). Between rows
 * a line, viscosity as a line of its logarithm: within 0.3 % (viscosity 0.6 %) of the formulation.
 */
export interface WaterProperties {
  /** kg/m³ */
  density: number;
  /** J/(kg·K) */
  specificHeat: number;
  /** Pa·s */
  viscosity: number;
  /** W/(m·K) */
  conductivity: number;
  prandtl: number;
}

/** °C, density, specific heat, viscosity, conductivity. */
const table: readonly (readonly [number, number, number, number, number])[] = [
  [0, 999.9, 4219, 1.7916e-3, 0.5612],
  [10, 999.75, 4194.8, 1.30581e-3, 0.578842],
  [20, 998.252, 4183.74, 1.00157e-3, 0.59807],
  [30, 995.693, 4179.55, 0.79722e-3, 0.614447],
  [40, 992.26, 4179.17, 0.652741e-3, 0.628538],
  [50, 988.078, 4181.11, 0.546536e-3, 0.640673],
  [60, 983.239, 4184.73, 0.466059e-3, 0.651052],
  [70, 977.8, 4190, 0.4035e-3, 0.6596],
  [80, 971.8, 4197, 0.3544e-3, 0.6668],
  [90, 965.3, 4206, 0.3145e-3, 0.6728],
  [100, 958.4, 4217, 0.2818e-3, 0.6775],
];

/** Properties at a temperature, held at the ends of 0 to 100 °C. */
export function water(temperatureC: number): WaterProperties {
  const t = Math.min(100, Math.max(0, temperatureC));
  const index = Math.min(table.length - 2, Math.floor(t / 10));
  const a = table[index];
  const b = table[index + 1];
  if (!a || !b) throw new Error('water table has no such row');
  const x = (t - a[0]) / (b[0] - a[0]);
  const line = (p: number, q: number) => p + (q - p) * x;
  const density = line(a[1], b[1]);
  const specificHeat = line(a[2], b[2]);
  const viscosity = Math.exp(line(Math.log(a[3]), Math.log(b[3])));
  const conductivity = line(a[4], b[4]);
  return {
    density,
    specificHeat,
    viscosity,
    conductivity,
    prandtl: (specificHeat * viscosity) / conductivity,
  };
}
