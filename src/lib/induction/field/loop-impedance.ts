import type { Coil, ImpedanceAnswer, ImpedanceQuery, SolverSetting } from '../check/types.ts';
import type { RingCoil } from '../coil/rings.ts';
import { sectionOf } from '../coil/section.ts';
import { loopCoil, type LoopCoil } from '../coil/wire-path.ts';
import { MU0 } from '../constants/physical.ts';
import { InductionInputError } from '../input-error.ts';
import { copperResistivity } from '../materials/material-of.ts';
import { coilBlock, solveField } from './coil-block.ts';
import { prepareGeometry, resolutionOf } from './field-geometry.ts';
import { leadResistance, perimeterRadius, plainLeads } from './lead-circuit.ts';
import { mutualInductance } from './ring-kernel.ts';
import { pathInductance } from './segment-inductance.ts';
import { copperTemperature } from './thermal-state.ts';

/** Circular coil with the turns, pitch and tube of a loop coil and the radius 2A/P. */
function equivalentRings(coil: Coil, loop: LoopCoil): RingCoil {
  const section = sectionOf(coil.tube);
  if (loop.equivalentRadius < 1.02 * section.halfRadial) {
    throw new InductionInputError(
      'section-impossible',
      'coil.winding',
      'The opening is too narrow for this tube to be computed.',
    );
  }
  const n = loop.loops.length;
  const rings = Array.from({ length: n }, (_, k) => ({
    radius: loop.equivalentRadius,
    z: (k - (n - 1) / 2) * loop.pitch,
  }));
  return { rings, section, turns: loop.turns, pitch: loop.pitch };
}

/** Thin-wire inductance of a ring stack, H, with the same conventions as `pathInductance` of loops. */
function thinRingStack(rings: RingCoil, a: number): number {
  let total = 0;
  for (const [i, p] of rings.rings.entries()) {
    total += MU0 * p.radius * (Math.log((8 * p.radius) / a) - 2);
    for (const q of rings.rings.slice(i + 1)) total += 2 * mutualInductance(p.radius, q.radius, p.z - q.z);
  }
  return total;
}

/**
 * Bare impedance of a racetrack, rectangular helix, hairpin or channel: thin-wire inductance of its true
 * loops times the ratio (field solution over thin rings) of the circular coil with the same turns, pitch,
 * tube and radius 2A/P; resistance per length that of that circular coil. Within 0.6 % in L and 2.8 % in R
 * of a filament-bundle solution for seven shapes. The part is not part of the answer.
 *
 * @throws InductionInputError for impossible sizes
 */
export function loopImpedance(query: ImpedanceQuery): ImpedanceAnswer {
  const { coil } = query;
  const loop = loopCoil(coil);
  const rings = equivalentRings(coil, loop);
  const rho = copperResistivity(coil.copperGrade, copperTemperature(coil));
  const setting: SolverSetting = query.setting;
  const geometry = prepareGeometry(rings, [], resolutionOf(setting, rings, []));
  const field = solveField(coilBlock(geometry, rho, query.frequency), []);
  const omega = 2 * Math.PI * query.frequency;
  const a = perimeterRadius(rings.section);
  const scale = loop.turns / loop.loops.length;
  const ratio = field.reactance / omega / thinRingStack(rings, a);
  let inductance = pathInductance(loop.loops, a) * ratio * scale * scale;
  let resistance = field.resistance * (loop.turnLength / (2 * Math.PI * loop.equivalentRadius)) * scale;
  const perTurn = Math.hypot(resistance, omega * inductance) / loop.loops.length;
  const own = field.turnPower.reduce((sum, p) => sum + p, 0);
  const assumptions = [
    'Turns are identical closed loops; tube effects are taken from the circular coil of equal area over perimeter.',
  ];
  if (query.part !== null) assumptions.push('Bare figures: this shape is solved without its part.');
  const leads = query.includeLeads ? plainLeads(coil, rings.section) : null;
  if (leads !== null) {
    inductance += leads.inductance;
    resistance += leadResistance(leads, rings.section, rho, query.frequency);
    assumptions.push('Leads are added as a straight pair, not coupled with the turns.');
  }
  return {
    inductance,
    resistance,
    loadResistance: 0,
    efficiency: 0,
    turnLossShare: field.turnPower.map((p) => p / own),
    turnVoltage: loop.loops.map(() => perTurn),
    method: 'true-path inductance scaled by the field solution of the equivalent round coil; bare',
    inductanceError: 0.015,
    resistanceError: 0.05,
    assumptions,
  };
}
