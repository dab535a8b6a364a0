/** The bare coil: at the operating and at the test frequency, with its leads, and the cheap second opinion. */
import { cheapBareInductance } from '../field/cheap.ts';
import { gapBetweenTurns } from './build-models.ts';
import { coilFigures, leadFigures } from './coil-figures.ts';
import type { CoilSource } from './coil-model.ts';
import type { CheckContext } from './context.ts';
import type { Geometry } from './resolve.ts';
import { coilSources } from './sensitivity.ts';
import type { CheckOptions, Solver } from './solver.ts';
import type { ImpedanceAnswer } from './types.ts';

/** @param guess frequency where the tank gives none, Hz */
export function addBare(
  context: CheckContext,
  solver: Solver,
  options: CheckOptions,
  guess: number | null,
): void {
  const { requirement, geometry } = context;
  if (!geometry.section || !geometry.resolved) return;
  const supply = requirement.machine.supply;
  const frequency = context.fittedRow?.points.hot.frequency ?? guess ?? supply.frequencyMin ?? 20e3;
  const ask = (f: number, includeLeads: boolean) =>
    solver.ask({
      coil: geometry.coil,
      part: null,
      frequency: f,
      state: 'cold',
      current: 1,
      includeLeads,
      setting: options.setting,
    });
  const answer = ask(frequency, true);
  if (!answer) return;
  context.bareAnswer = answer;
  const sources = bareSources(solver, geometry, frequency, answer, options);
  context.bare = coilFigures(answer, frequency, sources);
  const test = requirement.acceptance.find((line) => line.kind === 'inductance')?.testFrequency ?? null;
  const atTest = test === null || Math.abs(test / frequency - 1) < 1e-6 ? answer : ask(test, true);
  if (atTest) context.bareAtTest = coilFigures(atTest, test ?? frequency, sources);
  if (requirement.coil.leads && requirement.coil.leads.length > 0) {
    const without = ask(frequency, false);
    if (without) context.leads = leadFigures(answer, without);
  }
  if (geometry.rings) {
    const cheap = cheapBareInductance(geometry.rings);
    const own = answer.inductance - (context.leads?.inductance.value ?? 0);
    context.sanity = { inductance: cheap, difference: cheap / own - 1 };
  }
}

function bareSources(
  solver: Solver,
  geometry: Geometry,
  frequency: number,
  answer: ImpedanceAnswer,
  options: CheckOptions,
): CoilSource[] {
  if (options.bands === false) {
    const shift = {
      inductance: answer.inductanceError,
      coilResistance: answer.resistanceError,
      loadResistance: 0,
    };
    return [{ name: 'error of the method', variation: { value: answer.inductanceError, unit: '1' }, shift }];
  }
  return coilSources(solver, {
    question: {
      coil: geometry.coil,
      part: null,
      frequency,
      state: 'cold',
      current: 1,
      includeLeads: true,
      setting: options.setting,
    },
    nominal: answer,
    material: null,
    magnetic: false,
    gapBetweenTurns: gapBetweenTurns(geometry),
  });
}
