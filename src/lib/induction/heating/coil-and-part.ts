import { MU0 } from '../constants/physical.ts';
import { InductionInputError } from '../input-error.ts';
import { describingPermeability } from '../materials/magnetisation.ts';
import { copperResistivity, materialOf } from '../materials/material-of.ts';
import type { Material } from '../materials/types.ts';
import { coilBlock, type CoilBlock } from '../field/coil-block.ts';
import type { KeptLoad } from '../field/field-geometry.ts';
import { leadGeometry, leadResistance, type LeadGeometry } from '../field/lead-circuit.ts';
import { nodeFields } from '../field/load-operator.ts';
import {
  depthAt,
  estimatedPeakField,
  impedanceOf,
  partModel,
  solveParts,
  type PartModel,
  type RingImpedance,
} from '../field/part-model.ts';
import { prepareCoil, type PreparedCoil } from '../field/solve-impedance.ts';
import { copperTemperature } from '../field/thermal-state.ts';
import { cellSources } from './heat-source.ts';
import type { HeatingInput } from './types.ts';

/** Field at a representative strength for the drift of the permeability, A/m peak. */
const REPRESENTATIVE_FIELD = 30_000;

/** The electrical state at one temperature field. */
export interface ElectricState {
  current: number;
  voltage: number;
  inductance: number;
  resistance: number;
  frequency: number;
  partPower: number;
  totalPower: number;
  /** W per thermal cell of the (half) grid. */
  source: Float64Array;
}

/** Terminal impedance seen from the bank: rings, leads and fixed circuit. */
interface Terminal {
  resistance: number;
  reactance: number;
}

/**
 * Coil and part of a heating run: keeps geometry, factored coil, grid and the permeability of the last
 * state, and gives the electrical state for any temperature field.
 */
export class CoilAndPart {
  readonly prepared: PreparedCoil;
  readonly load: KeptLoad;
  readonly material: Material;
  readonly model: PartModel;
  readonly assumptions: string[] = [];
  solutions = 0;
  updates = 0;
  private readonly input: HeatingInput;
  private readonly leads: LeadGeometry | null;
  private readonly scale: number;
  private block: CoilBlock;
  private permeability: Float64Array[] | null = null;
  private solvedResistivity: Float64Array = new Float64Array(0);
  private solvedDrift: Float64Array = new Float64Array(0);
  private weights: Float64Array = new Float64Array(0);

  constructor(input: HeatingInput) {
    this.input = input;
    this.prepared = prepareCoil(input.coil, input.part, input.setting);
    const load = this.prepared.geometry.loads[0];
    if (load === undefined)
      throw new InductionInputError('outside-method', 'part', 'There is no part to heat.');
    this.load = load;
    this.material = materialOf(input.part.material, input.materialHotTemperatureC);
    if (!this.material.conducts) {
      throw new InductionInputError(
        'does-not-conduct',
        'part.material',
        'The part does not conduct: it needs a susceptor.',
      );
    }
    this.scale = this.prepared.rings.turns / this.prepared.rings.rings.length;
    this.leads = input.includeLeads ? leadGeometry(input.coil, this.prepared.rings) : null;
    this.block = this.blockFor(this.firstFrequency());
    // A first solution gives the current, and with it the permeability the grid has to resolve.
    const rough = this.modelFor(0);
    const first = solveParts(this.block, [rough], (z) => this.ringCurrent(z));
    this.solutions += first.iterations;
    this.model = this.modelFor(first.current / this.scale);
  }

  /** Frequency of the state just solved. */
  get frequency(): number {
    return this.block.frequency;
  }

  /** Solves for temperatures per element, °C; follows the tank's frequency. */
  solve(temperature: Float64Array): ElectricState {
    this.model.temperature.set(temperature);
    this.updates++;
    for (let round = 0; ; round++) {
      const s = solveParts(this.block, [this.model], (z) => this.ringCurrent(z), this.permeability);
      this.solutions += s.iterations;
      this.permeability = s.permeability;
      const z = impedanceOf(s.field);
      const terminal = this.terminal(z);
      const frequency = this.tankFrequency(terminal);
      if (Math.abs(frequency / this.block.frequency - 1) > 0.03 && round < 8) {
        this.block = this.blockFor(frequency);
        continue;
      }
      const rho = s.resistivity[0] as Float64Array;
      const { start, count } = this.load;
      const k = {
        re: s.field.k.re.subarray(start, start + count),
        im: s.field.k.im.subarray(start, start + count),
      };
      const fields = nodeFields(s.loads[0] as (typeof s.loads)[number], k);
      const partPower = z.load * s.current * s.current;
      const share = this.model.elements.grid.half ? 0.5 : 1;
      const source = cellSources(this.model.elements, fields, rho, partPower * share);
      this.remember(rho, temperature, source);
      const current = s.current / this.scale;
      const omega = 2 * Math.PI * this.block.frequency;
      return {
        current,
        voltage: current * Math.hypot(terminal.resistance, terminal.reactance),
        inductance: terminal.reactance / omega,
        resistance: terminal.resistance,
        frequency,
        partPower,
        totalPower: terminal.resistance * current * current,
        source,
      };
    }
  }

  /** Power-weighted mean change of ln ρ and ln μ since the last solution; the larger of the two. */
  drift(temperature: Float64Array): number {
    let rho = 0;
    let mu = 0;
    let total = 0;
    const now = this.driftValues(temperature);
    for (let k = 0; k < temperature.length; k++) {
      const w = this.weights[k] as number;
      total += w;
      rho +=
        w *
        Math.abs(
          Math.log(
            this.material.resistivity(temperature[k] as number) / (this.solvedResistivity[k] as number),
          ),
        );
      mu += w * Math.abs(Math.log((now[k] as number) / (this.solvedDrift[k] as number)));
    }
    return total > 0 ? Math.max(rho, mu) / total : 0;
  }

  private driftValues(temperature: Float64Array): Float64Array {
    const law = this.material.magnetisation;
    return temperature.map((t) => (law === null ? 1 : describingPermeability(law, t, REPRESENTATIVE_FIELD)));
  }

  private remember(rho: Float64Array, temperature: Float64Array, source: Float64Array): void {
    this.solvedResistivity = rho.slice();
    this.solvedDrift = this.driftValues(temperature);
    const { nr, nz } = this.model.elements;
    this.weights = new Float64Array(nr * nz);
    for (let iz = 0; iz < 2 * nz; iz++) {
      for (let ir = 0; ir < 2 * nr; ir++) {
        const at = (iz >> 1) * nr + (ir >> 1);
        this.weights[at] = (this.weights[at] as number) + (source[iz * 2 * nr + ir] as number);
      }
    }
  }

  /** Grid fine enough for the smallest skin depth between start and a forging heat. */
  private modelFor(current: number): PartModel {
    const { input, prepared, block } = this;
    const peak = estimatedPeakField(prepared.geometry, current);
    let smallest = Number.POSITIVE_INFINITY;
    const top = Math.max(1250, input.targetTemperatureC ?? 0);
    for (let t = input.startTemperatureC; t <= top; t += 25) {
      smallest = Math.min(smallest, depthAt(this.material, t, block.frequency, peak));
    }
    const cold = { surface: input.startTemperatureC, core: input.startTemperatureC, depth: null };
    return partModel(
      prepared.geometry,
      this.load,
      this.material,
      cold,
      block.frequency,
      current,
      null,
      smallest,
    );
  }

  private blockFor(frequency: number): CoilBlock {
    const rho = copperResistivity(this.input.coil.copperGrade, copperTemperature(this.input.coil));
    return coilBlock(this.prepared.geometry, rho, frequency);
  }

  private firstFrequency(): number {
    const { frequency } = this.input;
    if (frequency.kind === 'fixed') return frequency.frequency;
    // From the coil's own thin-ring size; corrected by the first solutions.
    const trial = this.blockFor(1e4);
    const nt = this.prepared.geometry.turnColumns;
    let reactance = 0;
    for (const [t, turn] of this.prepared.geometry.turns.entries()) {
      const times = turn.mirror >= 0 && turn.mirror !== turn.turn ? 2 : 1;
      reactance += times * (trial.bare.im[nt + t] as number) * 2 * Math.PI * 1e4 * MU0;
    }
    const l = (reactance / (2 * Math.PI * 1e4)) * this.scale * this.scale + this.extraInductance();
    return 1 / (2 * Math.PI * Math.sqrt(l * frequency.capacitance));
  }

  private extraInductance(): number {
    return this.input.fixedInductance + (this.leads?.inductance ?? 0);
  }

  private terminal(z: RingImpedance): Terminal {
    const s = this.scale;
    const rho = copperResistivity(this.input.coil.copperGrade, copperTemperature(this.input.coil));
    const leads =
      this.leads === null
        ? 0
        : leadResistance(this.leads, this.prepared.geometry.coil.section, rho, this.block.frequency);
    const omega = 2 * Math.PI * this.block.frequency;
    return {
      resistance: z.own * s + z.load * s * s + leads + this.input.fixedResistance,
      reactance: z.reactance * s * s + omega * this.extraInductance(),
    };
  }

  private ringCurrent(z: RingImpedance): number {
    const { drive } = this.input;
    if (drive.kind === 'current') return drive.current * this.scale;
    const t = this.terminal(z);
    const current =
      drive.kind === 'power'
        ? Math.sqrt(drive.power / Math.max(t.resistance, 1e-12))
        : drive.voltage / Math.max(Math.hypot(t.resistance, t.reactance), 1e-12);
    return current * this.scale;
  }

  /** Series: 1/(2π√(LC)); parallel: unity power factor, ω² = 1/(LC) − (R/L)². */
  private tankFrequency(t: Terminal): number {
    const { frequency } = this.input;
    if (frequency.kind === 'fixed') return frequency.frequency;
    const l = t.reactance / (2 * Math.PI * this.block.frequency);
    const lossless = 1 / (l * frequency.capacitance);
    const damping = frequency.tank === 'parallel' ? (t.resistance / l) ** 2 : 0;
    return Math.sqrt(Math.max(0.05 * lossless, lossless - damping)) / (2 * Math.PI);
  }
}
