/** The work of a check: all figures, before the findings. */
import { cheapBareInductance } from '../field/cheap.ts';
import { arrangements } from '../tank/bank.ts';
import { losslessFrequency } from '../tank/resonance.ts';
import { copperPath, type CopperPath } from '../shop/path.ts';
import { shopSheet } from '../shop/shop-sheet.ts';
import { InductionInputError } from '../input-error.ts';
import { assumeMachine } from './assume.ts';
import { buildModels, type Models } from './build-models.ts';
import { loadedFigures } from './coil-figures.ts';
import type { CheckContext } from './context.ts';
import { addBare } from './examine-bare.ts';
import { halfBand } from './figure.ts';
import { heatedArea, heatingFigures, surfaceLossDensity } from './heating-figures.ts';
import {
  adviseRow,
  circuitOf,
  ladderRows,
  partPower,
  rowSettings,
  solveRow,
  type SolvedRow,
} from './ladder.ts';
import { mechanicsFigures } from './mechanics-figures.ts';
import { resolveGeometry, type Geometry } from './resolve.ts';
import { skinFigures, surfaceFieldOf } from './skin-figures.ts';
import { Solver, type CheckOptions } from './solver.ts';
import { surroundingsFigures } from './surroundings-figures.ts';
import { powerChain, tankFigures } from './tank-figures.ts';
import type { ImpedanceAnswer, Requirement } from './types.ts';
import { assumeWater, waterFigures } from './water-figures.ts';

/** @throws CheckStoppedError when `shouldStop` says so; never for what is entered. */
export function examine(requirement: Requirement, options: CheckOptions): CheckContext {
  const geometry = resolveGeometry(requirement);
  const knownWater = assumeWater(requirement.machine.water);
  const context: CheckContext = {
    requirement,
    geometry,
    refusals: [],
    models: null,
    fittedRow: null,
    bareAnswer: null,
    path: null,
    knownWater,
    assumptions: [...knownWater.assumptions],
    largestCurrent: null,
    resolved: geometry.resolved,
    bare: null,
    bareAtTest: null,
    cold: null,
    hot: null,
    leads: null,
    tank: null,
    chain: [],
    skin: null,
    heating: null,
    water: null,
    mechanics: null,
    surroundings: null,
    shop: null,
    ladder: [],
    sanity: null,
  };
  if (geometry.notNumbers.length > 0) return context;
  const path = attemptPath(requirement, geometry);
  context.path = path;
  if (path) {
    context.mechanics = mechanicsFigures(requirement, geometry, path);
    context.shop = geometry.section
      ? shopSheet(requirement.coil, path, requirement.acceptance, requirement.machine.connection)
      : null;
  }
  const solver = new Solver(requirement, options);
  const guess = firstGuess(requirement, geometry);
  const models =
    geometry.part && guess
      ? buildModels(solver, geometry, requirement.machine, requirement.process, guess, options)
      : null;
  context.models = models;
  if (models) addTank(context, models, requirement);
  else
    context.assumptions.push(
      ...assumeMachine(requirement.machine, { inductance: 1e-6, resistance: 0.01 }).assumptions,
    );
  addBare(context, solver, options, guess?.frequency ?? null);
  if (models) {
    addSkin(context, models, requirement);
    addChain(context, models);
    addWater(context, models, requirement);
    addSurroundings(context, models, requirement);
  }
  addHeating(context, models, requirement);
  context.refusals = solver.refusals;
  options.onProgress?.(1);
  return context;
}

function attemptPath(requirement: Requirement, geometry: Geometry): CopperPath | null {
  if (!geometry.section || !geometry.resolved) return null;
  try {
    return copperPath(geometry.coil, requirement.part);
  } catch (error) {
    if (error instanceof InductionInputError) return null;
    throw error;
  }
}

/** A first inductance and frequency: cheap formulas and the fitted bank, else the middle of the supply's range. */
function firstGuess(
  requirement: Requirement,
  geometry: Geometry,
): { inductance: number; frequency: number } | null {
  const inductance = geometry.rings ? cheapBareInductance(geometry.rings) : 1e-6;
  const assumed = assumeMachine(requirement.machine, { inductance, resistance: 0.01 });
  const settings = rowSettings(assumed, arrangements(requirement.machine.bank));
  const setting =
    settings.find((one) => one.arrangement.fitted && one.tap === assumed.fittedTap) ?? settings[0];
  if (!setting || !(inductance > 0)) return null;
  const circuit = circuitOf(assumed, setting);
  const n2 = circuit.transformer && circuit.bankSide === 'primary' ? circuit.ratio ** 2 : 1;
  const leads = requirement.coil.leads ? 0.6e-6 * requirement.coil.leads.length : 0;
  const seen =
    n2 * (inductance + leads + circuit.fixedInductance) +
    (circuit.bankSide === 'primary' ? (circuit.transformer?.leakage ?? 0) : 0);
  const frequency = losslessFrequency(seen, circuit.capacitance);
  return { inductance, frequency: Math.min(1e7, Math.max(10, frequency)) };
}

function addTank(context: CheckContext, models: Models, requirement: Requirement): void {
  const { assumed, states } = models;
  const solved = models.settings.flatMap(
    (setting) => solveRow(assumed, setting, states, models.startFrequency) ?? [],
  );
  const fitted = solved.find((row) => row.setting === models.fitted) ?? null;
  context.assumptions.push(...assumed.assumptions);
  context.ladder = ladderRows(assumed, solved, states, requirement.machine.transformer);
  // A row stands for the machine even where nothing is marked as fitted.
  adviseRow(context.ladder, assumed);
  context.fittedRow = fitted;
  if (!fitted) return;
  standIn(context, solved.indexOf(fitted));
  const { cold, hot } = fitted.points;
  context.cold = loadedFigures(models.nominal.cold, cold.frequency, states.cold.sources);
  context.hot = loadedFigures(models.nominal.hot, hot.frequency, states.hot.sources);
  context.tank = tankFigures(
    assumed,
    fitted,
    states,
    requirement.coil.centreTap ? tapShare(models.nominal.hot) : null,
  );
  const usable = context.ladder.filter((row) => row.fitted || row.fits);
  context.largestCurrent = Math.max(
    cold.state.coilCurrent,
    hot.state.coilCurrent,
    ...usable.flatMap((row) => [row.cold.coilCurrent, row.hot.coilCurrent]),
  );
}

/** Where no setting is marked as fitted, the one the figures were made for stands in, and that is said. */
function standIn(context: CheckContext, index: number): void {
  const row = context.ladder[index];
  if (!row || context.ladder.some((one) => one.fitted)) return;
  row.fitted = true;
  context.assumptions.push({
    field: 'machine.bank',
    name: 'bank setting fitted now',
    value: null,
    taken: `“${row.label}”`,
    band: 0,
    severity: 'caution',
    howToFind: 'Mark the units, total and tap that are connected, or take the advised setting.',
  });
}

/** Share of the coil's voltage in the first half of its turns. */
export function tapShare(answer: ImpedanceAnswer): number {
  const total = answer.turnVoltage.reduce((sum, v) => sum + v, 0);
  const n = answer.turnVoltage.length;
  const half = answer.turnVoltage.reduce((sum, v, i) => sum + v * Math.min(1, Math.max(0, n / 2 - i)), 0);
  return total > 0 ? half / total : 0.5;
}

function addChain(context: CheckContext, models: Models): void {
  if (!context.fittedRow) return;
  const { cold, bareAnswer, leads } = context;
  const own =
    bareAnswer && leads && cold ? Math.min(0.95, leads.resistance.value / bareAnswer.resistance) : null;
  context.chain = powerChain(
    models.assumed,
    context.fittedRow,
    models.states.hot,
    requirementHasLeads(context) ? own : null,
  );
}

const requirementHasLeads = (context: CheckContext) => (context.requirement.coil.leads?.length ?? 0) > 0;

function addSkin(context: CheckContext, models: Models, requirement: Requirement): void {
  const { material, part } = context.geometry;
  const row = context.fittedRow;
  if (!material || !part || !row) return;
  const cold = row.points.cold;
  context.skin = skinFigures({
    coil: requirement.coil,
    part,
    process: requirement.process,
    material,
    frequencyCold: cold.frequency,
    frequencyHot: row.points.hot.frequency,
    surfaceField: surfaceFieldOf(
      partPower(cold),
      heatedArea(part),
      material.resistivity(requirement.process.startTemperatureC),
      cold.frequency,
      material.magnetisation?.saturation ?? null,
    ),
  });
}

function addHeating(context: CheckContext, models: Models | null, requirement: Requirement): void {
  const { material } = context.geometry;
  const { part, process } = requirement;
  if (!material || part.form === 'drawing') return;
  if (!(part.outsideDiameter > part.insideDiameter) || !(part.length > 0)) return;
  const row: SolvedRow | null = context.fittedRow;
  const chainPart = context.chain.find((step) => step.name === 'part')?.power;
  let power = null;
  if (row && models && chainPart) {
    const coldValue = partPower(row.points.cold);
    const share = chainPart.value > 0 ? halfBand(chainPart) / chainPart.value : 0;
    const cold = {
      ...chainPart,
      value: coldValue,
      low: coldValue * (1 - share),
      high: coldValue * (1 + share),
    };
    power = { cold, hot: chainPart };
  }
  context.heating = heatingFigures(part, process, material, power);
}

function addWater(context: CheckContext, models: Models, requirement: Requirement): void {
  const row = context.fittedRow;
  const { path, geometry } = context;
  if (!row || !path || !geometry.material) return;
  const copper = (state: 'cold' | 'hot') =>
    row.points[state].state.coilCurrent ** 2 * row.points[state].point.coilResistance;
  const worst = Math.max(copper('cold'), copper('hot'));
  const loss = surfaceLossDensity(
    requirement.process.targetTemperatureC,
    geometry.material.emissivity,
    requirement.process.atmosphere,
  );
  const fromPart = loss * heatedArea(requirement.part);
  const coilStep = context.chain.find((step) => step.name === 'coil')?.power;
  const share = coilStep && coilStep.value > 0 ? halfBand(coilStep) / coilStep.value : 0.1;
  context.water = waterFigures({
    coil: requirement.coil,
    path,
    water: context.knownWater,
    copperHeat: { value: worst, band: worst * share },
    partHeat: { value: fromPart, band: fromPart * 0.4 },
    turnLossShare: models.nominal.hot.turnLossShare,
  });
}

function addSurroundings(context: CheckContext, models: Models, requirement: Requirement): void {
  if (context.largestCurrent === null || !context.fittedRow || !context.tank) return;
  const share = halfBand(context.tank.coilCurrent) / context.tank.coilCurrent.value;
  context.surroundings = surroundingsFigures(
    requirement,
    context.geometry,
    { value: context.largestCurrent, band: share },
    context.fittedRow.points.hot.frequency,
  );
}
