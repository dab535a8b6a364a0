/** What the shop needs at once: lengths, mass, mandrel, bends, joints, circuits, tests. */
import type { AcceptanceLine, Coil, CoilConnection, Figure, ShopSheet } from '../check/types.ts';
import { metalArea, sectionOf } from '../coil/section.ts';
import type { CopperPath } from './path.ts';
import { bendingSize } from './path.ts';

/** Copper, kg/m³ (copper fact sheet of copper.org). */
const copperDensity = 8920;
/** Length of a stocked piece: annealed round tube comes in coils of 15 m, drawn sections in 3 m lengths (common practice). */
const stockLength = { round: 15, drawn: 3 };
/** Gripping and trimming allowance at each end, m (common practice). */
const endAllowance = 0.05;

const estimate = (value: number, share: number, unit: Figure['unit'], method: string): Figure => ({
  value,
  low: value * (1 - share),
  high: value * (1 + share),
  unit,
  method,
  assumptions: [],
  contributors: [],
});

/** Shop sheet of a coil whose path is known. */
export function shopSheet(
  coil: Coil,
  path: CopperPath,
  acceptance: readonly AcceptanceLine[],
  connection: CoilConnection | null,
): ShopSheet {
  const section = sectionOf(coil.tube);
  const developed = path.windingLength + 2 * (coil.leads?.length ?? 0);
  const cut = developed * 1.02 + 2 * endAllowance;
  const stock = coil.tube.kind === 'round' ? stockLength.round : stockLength.drawn;
  const splices = Math.max(0, Math.ceil(cut / stock) - 1);
  // Two leads into the connection, one water tail per end and circuit, one tap, one splice where stock is short.
  const joints = 2 + 2 * coil.waterCircuits + (coil.centreTap ? 1 : 0) + splices;
  return {
    developedLength: estimate(developed, 0.01, 'm', 'centre line of the turns plus both leads'),
    cutLength: estimate(cut, 0.02, 'm', 'developed length plus 2 % and 50 mm at each end (common practice)'),
    copperMass: estimate(
      metalArea(section) * developed * copperDensity,
      0.05,
      'kg',
      'section area × length × 8920 kg/m³',
    ),
    mandrelDiameter: mandrel(coil, path, section.halfRadial),
    bendRadiusOverTube: path.bendRadius / bendingSize(section),
    bends: path.bends + (coil.leads ? leadBends(coil) : 0),
    brazedJoints: joints,
    waterCircuits: coil.waterCircuits,
    tests: testList(coil, acceptance),
    connectionParts: connectionParts(connection, coil),
  };
}

/** Nominal mandrel before springback: the clear opening of a round coil wound on its inside. */
function mandrel(coil: Coil, path: CopperPath, half: number): Figure | null {
  const shape = coil.winding.shape;
  if (shape !== 'helix' && shape !== 'single-turn' && shape !== 'bore') return null;
  const diameter = 2 * (path.bendRadius - half);
  return {
    ...estimate(diameter, 0.01, 'm', 'clear opening of the winding, before springback'),
    assumptions: ['Springback depends on temper and tube: the shop sets the mandrel by its own trial.'],
  };
}

function leadBends(coil: Coil): number {
  return coil.handing.leadExit === 'tangential' ? 0 : 2;
}

function testList(coil: Coil, acceptance: readonly AcceptanceLine[]): string[] {
  const lines = acceptance.map((line) => line.label).filter((label) => label.trim() !== '');
  const has = (kind: AcceptanceLine['kind']) => acceptance.some((line) => line.kind === kind);
  if (!has('inductance'))
    lines.push('Inductance of the coil alone, instrument, frequency and lead state recorded');
  if (!has('hydrostatic')) lines.push('Hydrostatic test at 1.5 times the working pressure');
  if (!has('flow')) lines.push('Water flow at the stated differential pressure, each circuit');
  if (!has('dc-resistance')) lines.push('DC resistance by four wires, with copper temperature');
  if (coil.insulation.kind !== 'none' && !has('insulation'))
    lines.push('Insulation between neighbouring turns');
  return lines;
}

function connectionParts(connection: CoilConnection | null, coil: Coil): string[] {
  if (!connection) return [];
  const names = {
    plate: 'contact plates',
    blade: 'contact blades',
    'quick-change': 'quick-change halves',
    custom: 'connection to drawing',
  };
  const parts = [`1 pair of ${names[connection.kind]}`];
  if (connection.waterPorts.trim() !== '') parts.push(`water ports: ${connection.waterPorts}`);
  else parts.push(`${2 * coil.waterCircuits} water tails`);
  if (coil.centreTap) parts.push('centre tap lug');
  if (coil.support.kind !== 'none') parts.push(`${coil.support.count} ${coil.support.kind}`);
  return parts;
}
