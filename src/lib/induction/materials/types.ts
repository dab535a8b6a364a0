/**
 * Where a material value comes from.
 * sourced: read in a named source (or a named secondary copy of it);
 * evaluated: computed here from a named formula; memory: an engineer's recollection, to be replaced.
 * own: entered by the user.
 */
export type Standing = 'sourced' | 'evaluated' | 'memory' | 'own';

/** The record behind one property. `rangeC`: temperatures the source covers; outside, see `beyond`. */
export interface PropertyRecord {
  source: string;
  standing: Standing;
  rangeC: readonly [number, number];
  /** Half width of the band as a fraction of the value. */
  uncertainty: number;
  /** What is used outside `rangeC`. */
  beyond: string;
}

/**
 * Anhysteretic magnetisation of a magnetic material, Froehlich form:
 * B = μ0·H + Bs(T)·H/(H + Hk),  Hk = Bs(T)/(μ0·(μi − 1)).
 * Bs(T) = Bs0·√(1 − x³), x = (T − 20)/(Tc − 20) clamped to 0…1; Bs = 0 (μr = 1) at and above Curie.
 */
export interface MagnetisationLaw {
  initialPermeability: number;
  /** T at 20 °C. */
  saturation: number;
  curieC: number;
}

export type MaterialFamily =
  | 'carbon-steel'
  | 'alloy-steel'
  | 'stainless-steel'
  | 'aluminium'
  | 'copper'
  | 'brass'
  | 'titanium'
  | 'nickel-alloy'
  | 'carbide'
  | 'graphite'
  | 'refractory'
  | 'own';

export type PropertyName =
  'resistivity' | 'magnetisation' | 'specificHeat' | 'conductivity' | 'density' | 'emissivity' | 'solidus';

/** A material as the physics sees it. All functions take °C and are total: they clamp, never throw. */
export interface Material {
  id: string;
  name: string;
  family: MaterialFamily;
  /** False: no eddy currents; needs a susceptor. `resistivity` is then Infinity. */
  conducts: boolean;
  /** Ω·m at T °C. */
  resistivity(temperatureC: number): number;
  /** null: not magnetic (μr = 1). */
  magnetisation: MagnetisationLaw | null;
  /** J/(kg·K) at T °C. */
  specificHeat(temperatureC: number): number;
  /** J/kg above 20 °C (negative below). */
  enthalpy(temperatureC: number): number;
  /** W/(m·K) at T °C. */
  conductivity(temperatureC: number): number;
  /** kg/m³ at 20 °C; expansion is neglected (mass is conserved). */
  density: number;
  emissivity: number;
  /** Start of melting, °C; null where it has none (sublimes) or it is not known. */
  solidusC: number | null;
  records: Record<PropertyName, PropertyRecord>;
}
