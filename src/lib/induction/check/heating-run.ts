/** From a requirement and its check to the input of a heating run. */
import type { HeatingDrive, HeatingInput } from '../heating/types.ts';
import { assumeMachine } from './assume.ts';
import { timeAsked } from './heating-figures.ts';
import { explicitWinding } from './resolve.ts';
import type { CheckResult, Requirement, SolverSetting } from './types.ts';

export interface HeatingWish {
  /** null: constant deliverable power of the fitted row, part hot. */
  drive: HeatingDrive | null;
  /** Hz; null: the frequency follows the fitted bank. */
  frequency: number | null;
  /** s; null: the time asked, else three times the time of the energy balance. */
  duration: number | null;
  setting: SolverSetting;
}

export type HeatingInputAnswer =
  { ok: true; input: HeatingInput } | { ok: false; field: string; message: string };

/**
 * The bank is seen from the coil's side: n²·C for a bank on the primary side, with leakage/n² added to the fixed
 * inductance. Losses of bank and transformer are taken off the deliverable power before it goes into the coil.
 */
export function heatingInputOf(
  requirement: Requirement,
  check: CheckResult,
  wish: HeatingWish,
): HeatingInputAnswer {
  const { tank, hot } = check;
  const { process, part } = requirement;
  if (!tank || !hot) {
    return {
      ok: false,
      field: 'coil.winding',
      message: 'The check gives no loaded figures for this coil and part: there is nothing to heat with.',
    };
  }
  const assumed = assumeMachine(requirement.machine, {
    inductance: hot.inductance.value,
    resistance: hot.resistance.value,
  });
  const { transformer } = assumed.circuit;
  const ratio = transformer ? (assumed.ratios[assumed.fittedTap ?? 0] ?? 1) : 1;
  const primary = transformer !== null && assumed.circuit.bankSide === 'primary';
  const time = wish.duration ?? timeAsked(process) ?? 3 * (check.heating?.timeAtDeliverablePower?.value ?? 0);
  if (!(time > 0)) {
    return {
      ok: false,
      field: 'process.time',
      message: 'Enter a heating time: the energy balance gives none.',
    };
  }
  const power = tank.deliverablePower.value - tank.bankLoss.value - tank.transformerLoss.value;
  return {
    ok: true,
    input: {
      coil: { ...requirement.coil, winding: explicitWinding(requirement.coil.winding, part) },
      part,
      drive: wish.drive ?? { kind: 'power', power },
      frequency:
        wish.frequency === null
          ? {
              kind: 'tank',
              tank: assumed.connection,
              capacitance: tank.capacitance * (primary ? ratio ** 2 : 1),
            }
          : { kind: 'fixed', frequency: wish.frequency },
      fixedInductance:
        assumed.circuit.fixedInductance + (primary && transformer ? transformer.leakage / ratio ** 2 : 0),
      fixedResistance: assumed.circuit.fixedResistance,
      includeLeads: true,
      startTemperatureC: process.startTemperatureC,
      ambientTemperatureC: 20,
      time,
      targetTemperatureC: wish.duration === null ? process.targetTemperatureC : null,
      materialHotTemperatureC: process.targetTemperatureC,
      convection: process.atmosphere === 'vacuum' ? 0 : 10,
      emissivity: null,
      setting: wish.setting,
    },
  };
}
