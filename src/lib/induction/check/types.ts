/**
 * The vocabulary of the check: what goes in (machine, requirement) and what comes out (figures,
 * findings, ladder, result). Screens, API, storage and solver are all built from this file.
 *
 * Units: SI base units everywhere (m, s, Hz, H, F, V, A, W, Pa, m³/s, kg, Ω); temperatures in °C in
 * fields whose name ends in `C`; fractions as plain numbers (0.05 is five per cent); angles in degrees
 * in fields whose name ends in `Deg`. Voltages and currents are rms unless the name says peak.
 * `null` means *not known* (or not asked): a stated default with a wide band is used and an
 * `assumed-value` finding says so.
 */

// ---------------------------------------------------------------------------------------- machine

export type TankKind = 'series' | 'parallel' | 'choke-parallel' | 'push-pull' | 'not-known';

/** The power supply; limits are those at the inverter output. */
export interface Supply {
  frequencyMin: number | null;
  frequencyMax: number | null;
  ratedPower: number | null;
  /** V rms at the inverter output. */
  voltageLimit: number | null;
  /** A rms at the inverter output. */
  currentLimit: number | null;
  /** DC supply voltage, for a self-resonant push-pull stage. */
  dcVoltage: number | null;
  /** Peak voltage rating of one device, for a self-resonant push-pull stage. */
  devicePeakVoltage: number | null;
  /** Feeding choke of a push-pull or choke-fed stage. */
  chokeInductance: number | null;
  chokeSaturationCurrent: number | null;
}

export interface OutputTransformer {
  /** Selectable taps as primary turns per secondary turn, at least one, each > 0. */
  ratios: number[];
  /** Index into `ratios` of the tap connected now. */
  fittedTap: number;
  /** Referred to the primary. */
  leakageInductance: number | null;
  /** Seen from the primary. */
  magnetisingInductance: number | null;
  /** Referred to the primary. */
  windingResistance: number | null;
  bankSide: 'primary' | 'secondary';
  /** Largest primary volts per hertz, from the maker's plate (V/Hz). */
  voltsPerHertzLimit: number | null;
  apparentPowerLimit: number | null;
}

/** Bus and head between bank (or transformer) and the coil terminals. */
export interface FixedCircuit {
  inductance: number | null;
  /** Half width of the band as a fraction of the value. */
  inductanceBand: number | null;
  resistance: number | null;
  /** Capacitance across the tank that is not in the bank. */
  strayCapacitance: number | null;
  /** Set once the machine was calibrated: date (YYYY-MM-DD) and how. */
  calibration: { date: string; method: string } | null;
}

export interface BankGroup {
  unitCapacitance: number;
  /** Fraction, e.g. 0.05. */
  tolerance: number;
  /** Units owned. */
  count: number;
  /** Places for them on the machine. */
  positions: number;
  /** Units in series per string; strings are in parallel. 1 = all in parallel. */
  unitsInSeries: number;
  /** Units fitted now; a multiple of `unitsInSeries`. */
  fitted: number;
  /** Limits of one unit, V rms / A rms / var. */
  unitVoltageLimit: number | null;
  unitCurrentLimit: number | null;
  unitReactivePowerLimit: number | null;
  lossTangent: number | null;
}

export interface BankTotal {
  label: string;
  capacitance: number;
  tolerance: number;
  fitted: boolean;
  voltageLimit: number | null;
  currentLimit: number | null;
  reactivePowerLimit: number | null;
}

export type Bank = { kind: 'groups'; groups: BankGroup[] } | { kind: 'totals'; totals: BankTotal[] };

export interface CoolingSupply {
  inletTemperatureC: number | null;
  supplyPressure: number | null;
  returnPressure: number | null;
  /** Flow available to the coil where it is known instead of the pressures. */
  flow: number | null;
  outletLimitC: number | null;
  /** Smallest flow at which the machine's interlock lets it run. */
  interlockFlow: number | null;
}

export type ConnectionKind = 'plate' | 'blade' | 'quick-change' | 'custom';

export interface CoilConnection {
  kind: ConnectionKind;
  centreDistance: number | null;
  contactWidth: number | null;
  contactHeight: number | null;
  waterPorts: string;
  note: string;
}

export interface Machine {
  name: string;
  supply: Supply;
  tank: TankKind;
  transformer: OutputTransformer | null;
  fixed: FixedCircuit;
  bank: Bank;
  water: CoolingSupply;
  connection: CoilConnection | null;
}

// ------------------------------------------------------------------------------------ requirement

/** A material of the sourced library by id, or one entered by hand. */
export type MaterialChoice = { kind: 'library'; id: string } | { kind: 'own'; own: OwnMaterial };

export interface OwnMaterial {
  name: string;
  /** Electrical resistivity at 20 °C and at the target temperature, Ω·m; both null: does not conduct. */
  resistivity20: number | null;
  resistivityHot: number | null;
  /** Initial relative permeability; 1 = not magnetic. */
  relativePermeability: number;
  saturationFluxDensity: number | null;
  curieTemperatureC: number | null;
  density: number;
  /** Mean over the process, J/(kg·K). */
  specificHeat: number;
  /** Mean over the process, W/(m·K). */
  thermalConductivity: number;
  emissivity: number | null;
  solidusC: number | null;
}

export type PartForm = 'cylinder' | 'tube' | 'ring' | 'disc' | 'drawing';

export interface Workpiece {
  material: MaterialChoice;
  form: PartForm;
  outsideDiameter: number;
  /** 0 for solid forms. */
  insideDiameter: number;
  /** Axial length (thickness of a disc). */
  length: number;
  diameterTolerance: number | null;
  weighedMass: number | null;
  /** Axial length that must get hot; null = all of it. */
  heatedLength: number | null;
  /** Case or heated depth wanted below the surface; null = through. */
  depthWanted: number | null;
  /** Axial position of the part's middle from the coil's middle. */
  axialOffset: number;
  /** Radial runout while turning (total indicator reading). */
  runout: number | null;
  rotation: boolean;
}

export type ProcessPurpose =
  'hardening' | 'brazing' | 'shrink-fitting' | 'forging' | 'melting' | 'bonding' | 'annealing' | 'other';
export type ProcessMode = 'single-shot' | 'scan' | 'integral-quench';

export interface Process {
  purpose: ProcessPurpose;
  mode: ProcessMode;
  startTemperatureC: number;
  targetTemperatureC: number;
  /** Heating time; null when parts per hour is given or left to the machine. */
  time: number | null;
  partsPerHour: number | null;
  atmosphere: 'air' | 'inert' | 'reducing' | 'vacuum';
  highestSurfaceTemperatureC: number | null;
  quench: 'none' | 'separate' | 'in-coil';
}

export type CoilShape =
  | 'helix'
  | 'conical'
  | 'stepped'
  | 'pancake'
  | 'single-turn'
  | 'bore'
  | 'racetrack'
  | 'rectangular-helix'
  | 'hairpin'
  | 'channel'
  | 'drawing';

/**
 * The winding. Diameters and lengths are to the copper surface (inside = clear opening), pitches are
 * centre to centre. `turns: null` asks the checker to propose; `insideDiameter: null` takes it from
 * the part and `clearance` (radial, per side).
 */
export type Winding =
  | {
      shape: 'helix';
      insideDiameter: number | null;
      clearance: number | null;
      turns: number | null;
      pitch: number;
    }
  | {
      shape: 'conical';
      insideDiameter: number;
      endInsideDiameter: number;
      turns: number | null;
      pitch: number;
    }
  | { shape: 'stepped'; insideDiameters: number[]; pitch: number }
  | {
      shape: 'pancake';
      /** Clear diameter inside the first turn. */
      insideDiameter: number;
      turns: number | null;
      /** Radial pitch. */
      pitch: number;
      /** Axial gap from the tube surface to the part's face. */
      faceGap: number;
    }
  | { shape: 'single-turn'; insideDiameter: number | null; clearance: number | null }
  | {
      shape: 'bore';
      /** Over the copper: the coil goes inside the part. */
      outsideDiameter: number | null;
      clearance: number | null;
      turns: number | null;
      pitch: number;
    }
  | {
      shape: 'racetrack' | 'rectangular-helix';
      /** Clear opening along and across. */
      insideLength: number;
      insideWidth: number;
      /** Inside corner radius; a racetrack's is half its width. */
      cornerRadius: number;
      turns: number | null;
      pitch: number;
    }
  | {
      shape: 'hairpin';
      length: number;
      /** Clear distance between the legs. */
      legGap: number;
      turns: number | null;
      pitch: number;
    }
  | {
      shape: 'channel';
      /** Clear opening of the channel: length along, width across, height of the raised crossing. */
      insideLength: number;
      insideWidth: number;
      crossingHeight: number;
      turns: number | null;
      pitch: number;
    }
  | { shape: 'drawing'; note: string };

/** Conductor section. `axialWidth` is along the coil's axis, `radialHeight` across it. */
export type TubeSection =
  | { kind: 'round'; outsideDiameter: number; wall: number }
  | { kind: 'square'; side: number; wall: number; cornerRadius: number }
  | { kind: 'rectangular'; axialWidth: number; radialHeight: number; wall: number; cornerRadius: number };

export type CopperGrade = 'cu-etp' | 'cu-of' | 'cu-dhp';
export type LeadExit = 'axial' | 'radial' | 'tangential';

export interface Leads {
  /** Length of each of the two leads from the last turn to the contact face. */
  length: number;
  /** Centre to centre. */
  spacing: number;
}

/** How the coil sits on the machine; a missing answer blocks posting (`handing-missing`). */
export interface Handing {
  windingDirection: 'right' | 'left' | null;
  leadExit: LeadExit | null;
  /** Angle between the two leads seen along the axis. */
  leadAngleDeg: number | null;
  upEnd: 'lead-end' | 'far-end' | 'horizontal' | null;
  /** Distance of the first turn's centre from the contact face. */
  firstTurnFromFace: number | null;
}

export interface Coil {
  winding: Winding;
  tube: TubeSection;
  copperGrade: CopperGrade;
  /** Copper temperature the figures are for; null = 40 °C mean. */
  copperTemperatureC: number | null;
  leads: Leads | null;
  handing: Handing;
  /** Shop tolerances: ± on the opening, ± on the pitch. */
  diameterTolerance: number | null;
  pitchTolerance: number | null;
  support: { kind: 'none' | 'studs' | 'boards' | 'potting'; count: number };
  centreTap: boolean;
  insulation: { kind: 'none' | 'sleeve' | 'enamel' | 'ceramic' | 'tape'; thickness: number };
  /** Parallel water circuits. */
  waterCircuits: number;
}

export interface FixtureMetalPart {
  name: string;
  /** Place of its middle in the coil's frame: r from the axis, z from the coil's middle. */
  r: number;
  z: number;
  /** Characteristic size (diameter of the equivalent sphere). */
  size: number;
  material: MaterialChoice;
}

export interface Fixture {
  kind: 'none' | 'nest' | 'support' | 'rotating-centre' | 'other';
  material: string;
  datum: string;
  contact: string;
  contactTemperatureC: number | null;
  metalParts: FixtureMetalPart[];
  /** Distance of the person's place from the coil's middle. */
  operatorDistance: number | null;
  acceptance: string[];
}

export type AcceptanceKind =
  | 'inductance'
  | 'resistance'
  | 'inside-diameter'
  | 'pitch'
  | 'length'
  | 'hydrostatic'
  | 'flow'
  | 'insulation'
  | 'dc-resistance'
  | 'document'
  | 'other';

export interface AcceptanceLine {
  id: string;
  kind: AcceptanceKind;
  label: string;
  basis: 'computed' | 'buyer' | 'golden-coil';
  /** null where the line is a document or a yes/no test. */
  nominal: number | null;
  low: number | null;
  high: number | null;
  unit: Unit;
  /** For inductance: test frequency, temperature, where the leads are measured, what state. */
  testFrequency: number | null;
  temperatureC: number | null;
  measuringPlane: string;
  leadState: string;
  /** For a pressure test: hold time. For flow: the differential pressure it is read at. */
  holdTime: number | null;
  differentialPressure: number | null;
  note: string;
}

export type DesignResponsibility = 'to-drawing' | 'to-checked-figures' | 'to-result';

export interface Requirement {
  machine: Machine;
  part: Workpiece;
  process: Process;
  coil: Coil;
  fixture: Fixture;
  acceptance: AcceptanceLine[];
  designResponsibility: DesignResponsibility;
}

// ------------------------------------------------------------------------------------------- out

export type Unit =
  | 'H'
  | 'F'
  | 'Hz'
  | 'ohm'
  | 'V'
  | 'A'
  | 'W'
  | 'var'
  | 'VA'
  | 'm'
  | 'm2'
  | 'kg'
  | 's'
  | 'J'
  | 'K'
  | 'C'
  | 'Pa'
  | 'm3/s'
  | 'm/s'
  | 'T'
  | 'W/m2'
  | 'deg'
  | '1';

export interface Quantity {
  value: number;
  unit: Unit;
}

/** A contributor to a band: "inside diameter ±1 mm gives ±2.5 %". */
export interface BandContributor {
  name: string;
  /** Half width of what was varied, in its own unit. */
  variation: Quantity;
  /** What it does to the figure, as a fraction of the value. */
  effect: number;
}

export interface Figure {
  value: number;
  low: number;
  high: number;
  unit: Unit;
  /** Which formula or solver gave it. */
  method: string;
  assumptions: string[];
  /** At most three, largest first; empty where the band has one source. */
  contributors: BandContributor[];
}

export type Severity = 'blocker' | 'caution' | 'note';

export const findingCodes = [
  'assumed-value',
  'frequency-below-band',
  'frequency-above-band',
  'no-row-fits',
  'load-mismatch',
  'capacitor-voltage',
  'capacitor-current',
  'capacitor-kvar',
  'transformer-limit',
  'coil-voltage',
  'coil-current',
  'tap-unbalanced',
  'part-too-thin-for-frequency',
  'frequency-too-high-for-depth',
  'frequency-too-low-for-depth',
  'power-short',
  'time-short',
  'surface-overheats',
  'near-melting',
  'curie-crossing',
  'part-does-not-couple',
  'coupling-gap-small',
  'coupling-gap-large',
  'part-touches-coil',
  'turns-touch',
  'turn-insulation-needed',
  'tube-wall-thin',
  'bend-too-tight',
  'tube-not-stocked',
  'leads-dominate',
  'connection-missing',
  'handing-missing',
  'water-short',
  'water-hot',
  'water-fast',
  'water-laminar',
  'flow-below-interlock',
  'working-pressure-high',
  'test-pressure-high',
  'coil-efficiency-low',
  'q-out-of-range',
  'metal-in-field',
  'fixture-overheats',
  'field-at-operator',
  'acceptance-band-wide',
  'acceptance-band-narrow',
  'unit-doubt',
  'outside-method',
  'dimension-impossible',
  'mass-disagrees',
  'device-voltage',
  'choke-saturates',
  'start-up-caution',
  'turns-open',
] as const;
export type FindingCode = (typeof findingCodes)[number];

/** A change that would mend the finding; offered as a button. */
export interface Fix {
  label: string;
  /** Path into the requirement, e.g. `machine.bank.groups.0.fitted`. */
  field: string;
  value: number | string | boolean;
}

export interface Finding {
  code: FindingCode;
  severity: Severity;
  /** A safety matter: a blocker of this kind cannot be carried by the buyer. */
  safety: boolean;
  /** Path of the field it is about, e.g. `coil.winding.pitch`. */
  subject: string;
  figure: Quantity | null;
  limit: Quantity | null;
  /** (limit − figure)/limit: negative when the limit is passed; null where it has no sense. */
  margin: number | null;
  /**
   * One sentence with `{name}` places for the `values`, so that a reader sees numbers in their own
   * unit set; `message` is the same in metric units.
   */
  template: string;
  values: Record<string, Quantity>;
  message: string;
  /** What would mend it, in words. */
  remedy: string;
  fixes: Fix[];
  source: string;
}

export type Limiter = 'rated-power' | 'voltage' | 'current' | 'bank' | 'coil';

export interface LimitCheck {
  name: string;
  figure: Quantity;
  limit: Quantity;
  met: boolean;
}

/** One thermal state of one row of the bank ladder, at deliverable power. */
export interface LadderState {
  frequency: Figure;
  deliverablePower: Figure;
  limitedBy: Limiter;
  powerIntoPart: number;
  coilCurrent: number;
  coilVoltage: number;
  bankCurrent: number;
  bankVoltage: number;
  reactivePower: number;
  unitVoltage: number;
  unitCurrent: number;
  unitReactivePower: number;
  inverterVoltage: number;
  inverterCurrent: number;
  inBand: boolean;
  limits: LimitCheck[];
}

export interface LadderRow {
  id: string;
  label: string;
  capacitance: number;
  /** Units fitted per group (empty for listed totals). */
  unitsPerGroup: number[];
  /** Index into the transformer's taps; null without transformer. */
  tap: number | null;
  ratio: number;
  fitted: boolean;
  advised: boolean;
  reason: string;
  cold: LadderState;
  hot: LadderState;
  fits: boolean;
}

export interface CoilFigures {
  frequency: number;
  inductance: Figure;
  resistance: Figure;
  q: Figure;
}

export interface LoadedFigures extends CoilFigures {
  loadResistance: Figure;
  efficiency: Figure;
  phaseDeg: Figure;
}

export interface ChainStep {
  name: 'inverter' | 'transformer' | 'bank' | 'bus' | 'leads' | 'coil' | 'part';
  /** Power lost in the step (for the part: power that arrives). */
  power: Figure;
  /** As a fraction of what leaves the inverter. */
  share: number;
}

export interface TankFigures {
  kind: TankKind;
  capacitance: number;
  /** Inductance the bank sees, and to which side of the transformer it is referred. */
  inductance: Figure;
  referredTo: 'coil side' | 'primary side';
  resonanceCold: Figure;
  resonanceHot: Figure;
  operatingFrequency: Figure;
  q: Figure;
  characteristicImpedance: Figure;
  coilCurrent: Figure;
  coilVoltage: Figure;
  coilVoltageToTap: Figure | null;
  bankCurrent: Figure;
  reactivePower: Figure;
  deliverablePower: Figure;
  bankLoss: Figure;
  transformerLoss: Figure;
}

export interface WaterFigures {
  duty: Figure;
  flow: Figure;
  velocity: Figure;
  reynolds: Figure;
  temperatureRise: Figure;
  outletTemperature: Figure;
  wallTemperature: Figure;
  pressureDrop: Figure;
  circuitsAdvised: number;
}

export interface HeatingFigures {
  energy: Figure;
  meanPowerNeeded: Figure | null;
  timeAtDeliverablePower: Figure | null;
  surfaceLoss: Figure;
  massHeated: number;
}

export interface ShopSheet {
  developedLength: Figure;
  cutLength: Figure;
  copperMass: Figure;
  mandrelDiameter: Figure | null;
  bendRadiusOverTube: number;
  bends: number;
  brazedJoints: number;
  waterCircuits: number;
  tests: string[];
  connectionParts: string[];
}

export interface SurroundingsFigures {
  /** Distance on the axis / at the side beyond which the field is below the reference level. */
  keepOutDistance: Figure;
  referenceLevel: Quantity;
  referenceName: string;
  points: { name: string; fluxDensity: Figure }[];
}

export interface Mechanics {
  clearanceBetweenTurns: number | null;
  radialClearanceCold: number | null;
  radialClearanceHot: number | null;
  wallAfterBending: number;
  workingPressureRating: Figure;
  testPressure: number;
}

/** Skin depth in part and copper; part diameter (or wall) over skin depth. */
export interface SkinFigures {
  copper: Figure;
  partCold: Figure;
  partHot: Figure;
  diameterOverDepthCold: number;
  diameterOverDepthHot: number;
}

/** The requirement with the open values filled in, as the figures were computed. */
export interface ResolvedCoil {
  turns: number;
  insideDiameter: number;
  outsideDiameter: number;
  length: number;
  pitch: number;
}

export type SolverSetting = 'preview' | 'default' | 'fine';

export interface CheckResult {
  methodVersion: string;
  setting: SolverSetting;
  resolved: ResolvedCoil | null;
  /** Figures are null where the method does not give them; a finding says why. */
  bare: CoilFigures | null;
  /** Bare, at the test frequency of the acceptance line. */
  bareAtTest: CoilFigures | null;
  cold: LoadedFigures | null;
  hot: LoadedFigures | null;
  leads: { inductance: Figure; resistance: Figure; share: number } | null;
  tank: TankFigures | null;
  chain: ChainStep[];
  skin: SkinFigures | null;
  heating: HeatingFigures | null;
  water: WaterFigures | null;
  mechanics: Mechanics | null;
  surroundings: SurroundingsFigures | null;
  shop: ShopSheet | null;
  ladder: LadderRow[];
  /** Acceptance lines the checker proposes (inductance band from the frequency band, …). */
  proposedAcceptance: AcceptanceLine[];
  findings: Finding[];
  /** Independent cheap estimate of the bare inductance, for the 10 % sanity flag. */
  sanity: { inductance: number; difference: number } | null;
}

// -------------------------------------------------------------- the solver's face for the checker

/** One coil-with-part problem at one frequency and one thermal state. */
export interface ImpedanceQuery {
  coil: Coil;
  part: Workpiece | null;
  frequency: number;
  /** cold = start temperature; hot = surface layer (or the whole part) at target temperature. */
  state: 'cold' | 'hot';
  startTemperatureC: number;
  targetTemperatureC: number;
  /** Coil current for magnetic parts (permeability depends on it), A rms. */
  current: number;
  includeLeads: boolean;
  setting: SolverSetting;
}

export interface ImpedanceAnswer {
  inductance: number;
  resistance: number;
  /** Part of the resistance that heats the part. */
  loadResistance: number;
  /** loadResistance / resistance. */
  efficiency: number;
  /** Share of the coil's own loss in each turn, sums to 1. */
  turnLossShare: number[];
  /** Per-turn voltage magnitude for 1 A. */
  turnVoltage: number[];
  method: string;
  /** Model error alone, as fractions. */
  inductanceError: number;
  resistanceError: number;
  assumptions: string[];
}
