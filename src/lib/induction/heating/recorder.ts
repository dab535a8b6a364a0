import type { Material } from '../materials/types.ts';
import type { ElectricState } from './coil-and-part.ts';
import { surfaceTemperature, type ConductionState } from './conduction.ts';
import type { Places } from './thermal-grid.ts';
import type { HeatingBalance, HeatingPoint } from './types.ts';

const MOST_POINTS = 400;
/** Above this an entered material simply has no Curie point, °C. */
const NO_CURIE = 5000;

/** Keeps the curve, the Curie marks and the energies of a run. */
export class HeatingRecorder {
  readonly curve: HeatingPoint[] = [];
  readonly balance: HeatingBalance = { input: 0, stored: 0, lost: 0, closure: 0, coilLoss: 0 };
  readonly curieC: number | null;
  curieSurface: number | null = null;
  curieCore: number | null = null;
  private every = 1;
  private count = 0;
  private last: HeatingPoint | null = null;
  private readonly begin: number;

  /** `times`: 2 for a half grid, whose mirror image counts too. */
  constructor(
    private readonly state: ConductionState,
    private readonly places: Places,
    private readonly material: Material,
    private readonly ambientC: number,
    private readonly times: number,
  ) {
    const curie = material.magnetisation?.curieC ?? null;
    this.curieC = curie !== null && curie < NO_CURIE ? curie : null;
    this.begin = this.enthalpy().total;
  }

  /** Books a step that has been taken and returns its point; `step` 0 for the start. */
  record(time: number, step: number, electric: ElectricState): HeatingPoint {
    const point = this.pointAt(time, electric);
    const { balance } = this;
    balance.input += electric.partPower * step;
    balance.coilLoss += (electric.totalPower - electric.partPower) * step;
    balance.lost += point.surfaceLoss * step;
    if (this.last !== null && this.curieC !== null) {
      const { last, curieC } = this;
      this.curieSurface ??= crossing(last.surfaceC, point.surfaceC, last.time, time, curieC);
      this.curieCore ??= crossing(last.coreC, point.coreC, last.time, time, curieC);
    }
    this.last = point;
    this.keep(point);
    return point;
  }

  /** Closes curve and balance. */
  finish(): void {
    const { balance, curve, last } = this;
    if (last !== null && curve[curve.length - 1] !== last) curve.push(last);
    if (curve.length > MOST_POINTS) curve.splice(curve.length - 2, 1);
    balance.stored = this.enthalpy().total - this.begin;
    balance.closure = balance.input > 0 ? (balance.stored + balance.lost) / balance.input - 1 : 0;
  }

  /** At most 400 points: every other one goes when the list is full, never the first or last. */
  private keep(point: HeatingPoint): void {
    const due = this.count % this.every === 0;
    this.count++;
    if (!due) return;
    this.curve.push(point);
    if (this.curve.length < MOST_POINTS) return;
    const thinned = this.curve.filter((_, k) => k % 2 === 0);
    this.curve.splice(0, this.curve.length, ...thinned);
    this.every *= 2;
  }

  private enthalpy(): { mean: number; total: number } {
    let sum = 0;
    let volume = 0;
    for (let c = 0; c < this.state.temperature.length; c++) {
      const v = this.state.volume[c] as number;
      sum += v * this.material.enthalpy(this.state.temperature[c] as number);
      volume += v;
    }
    return { mean: sum / volume, total: sum * this.material.density * this.times };
  }

  private pointAt(time: number, electric: ElectricState): HeatingPoint {
    const { state, places, material } = this;
    let low = Number.POSITIVE_INFINITY;
    let high = Number.NEGATIVE_INFINITY;
    for (const t of state.temperature) {
      low = Math.min(low, t);
      high = Math.max(high, t);
    }
    const cell = state.temperature[places.surface] as number;
    const k = material.conductivity(cell);
    return {
      time,
      surfaceC: surfaceTemperature(cell, places.half, places.transfer, k, this.ambientC),
      meanC: temperatureOf(material, this.enthalpy().mean, low - 1, high + 1),
      coreC: state.temperature[places.core] as number,
      hottestC: high,
      partPower: electric.partPower,
      totalPower: electric.totalPower,
      surfaceLoss: state.loss * this.times,
      current: electric.current,
      voltage: electric.voltage,
      inductance: electric.inductance,
      resistance: electric.resistance,
      frequency: electric.frequency,
    };
  }
}

/** Temperature with a given enthalpy, by bisection. */
function temperatureOf(material: Material, enthalpy: number, low: number, high: number): number {
  let a = low;
  let b = high;
  for (let k = 0; k < 60; k++) {
    const mid = 0.5 * (a + b);
    if (material.enthalpy(mid) < enthalpy) a = mid;
    else b = mid;
  }
  return 0.5 * (a + b);
}

/** When a straight line between two points passes a level upwards; null when it does not. */
function crossing(t0: number, t1: number, from: number, to: number, level: number): number | null {
  if (t0 >= level || t1 < level) return null;
  return from + ((to - from) * (level - t0)) / Math.max(1e-9, t1 - t0);
}
