import { describe, expect, it } from 'vitest';
import { exampleRequirement } from '../check/examples.ts';
import type { ImpedanceQuery } from '../check/types.ts';
import { PermeabilityMemory } from './permeability-memory.ts';
import { solveImpedance } from './solve-impedance.ts';

const { coil, part } = exampleRequirement();
const cold: ImpedanceQuery = {
  coil,
  part,
  frequency: 2e4,
  state: 'cold',
  startTemperatureC: 20,
  targetTemperatureC: 880,
  current: 1500,
  includeLeads: false,
  setting: 'default',
};
const apart = (a: number, b: number) => Math.abs(a / b - 1);

describe('a start from permeability known before', () => {
  it('settles at what a start from nothing settles at, for another frequency, place and state', () => {
    const memory = PermeabilityMemory.empty();
    solveImpedance(cold, memory);
    const beside = { ...part, axialOffset: 0.004 };
    for (const change of [
      { frequency: 3e4 },
      { part: beside },
      { state: 'hot' as const },
      { current: 900 },
    ]) {
      const fresh = solveImpedance({ ...cold, ...change, setting: 'fine' });
      const carried = solveImpedance({ ...cold, ...change }, memory);
      expect(apart(carried.inductance, fresh.inductance), JSON.stringify(change)).toBeLessThan(3e-3);
      expect(apart(carried.loadResistance, fresh.loadResistance), JSON.stringify(change)).toBeLessThan(0.01);
    }
  });

  it('gives the same figures for the same run of questions', () => {
    const run = () => {
      const memory = PermeabilityMemory.empty();
      return [1e4, 2e4, 3e4].map((frequency) => solveImpedance({ ...cold, frequency }, memory));
    };
    expect(run()).toEqual(run());
  });

  it('gives differences as those of solutions that have settled fully, and leaves nothing behind', () => {
    const memory = PermeabilityMemory.empty();
    solveImpedance(cold, memory);
    const nearby = memory.forDifferences(3);
    const more = { ...cold, current: 1.05 * cold.current };
    const change = solveImpedance(more, nearby).loadResistance / solveImpedance(cold, nearby).loadResistance;
    expect(solveImpedance(more, nearby).loadResistance).toBe(solveImpedance(more, nearby).loadResistance);
    const settled = memory.forDifferences(24);
    const truth = solveImpedance(more, settled).loadResistance / solveImpedance(cold, settled).loadResistance;
    // More current saturates the steel: the part takes less of it, by about two per cent here.
    expect(1 - truth).toBeGreaterThan(0.01);
    expect(Math.abs(change - truth)).toBeLessThan(0.1 * (1 - truth));
  });

  it('is not used for a state that was never solved', () => {
    const nothing = PermeabilityMemory.empty().forDifferences(3);
    expect(solveImpedance(cold, nothing)).toEqual(solveImpedance(cold));
  });
});
