import type { InductionInputCode } from '../../input-error.ts';
import { plural } from './words.ts';
import type { CheckContext, Rule } from '../context.ts';
import type { Finding, FindingCode } from '../types.ts';
import { finding, quantity } from './finding.ts';

const codes: Partial<Record<InductionInputCode, FindingCode>> = {
  'turns-open': 'turns-open',
  'turns-overlap': 'turns-touch',
  'part-overlaps-coil': 'part-touches-coil',
  'outside-method': 'outside-method',
  'too-many-unknowns': 'outside-method',
  'not-converged': 'outside-method',
  'does-not-conduct': 'part-does-not-couple',
};
/** Codes that another rule says better. */
const elsewhere: FindingCode[] = [
  'turns-touch',
  'part-touches-coil',
  'turns-open',
  'outside-method',
  'part-does-not-couple',
];

const problemsOf = (context: CheckContext) => [...context.geometry.problems, ...context.refusals];

/** dimension-impossible: sizes that contradict each other or are no numbers. */
export const impossibleDimensions: Rule = (context) => {
  const out: Finding[] = context.geometry.notNumbers.map((path) =>
    finding({
      code: 'dimension-impossible',
      severity: 'blocker',
      subject: path,
      template: `The value at ${path} is not a number.`,
      remedy: 'Enter a number with its unit.',
      source: 'arithmetic',
    }),
  );
  for (const problem of problemsOf(context)) {
    const code = codes[problem.code] ?? 'dimension-impossible';
    if (elsewhere.includes(code)) continue;
    out.push(
      finding({
        code,
        severity: 'blocker',
        subject: problem.field,
        template: problem.message.replaceAll('{', '(').replaceAll('}', ')'),
        remedy: 'Correct the size, or the one it contradicts.',
        source: 'geometry',
      }),
    );
  }
  const { coil, part, process } = context.requirement;
  if (process.targetTemperatureC <= process.startTemperatureC) {
    out.push(
      finding({
        code: 'dimension-impossible',
        severity: 'blocker',
        subject: 'process.targetTemperatureC',
        figure: quantity(process.targetTemperatureC, 'C'),
        limit: quantity(process.startTemperatureC, 'C'),
        limitIsLeast: true,
        template: 'The target of {figure} is not above the start temperature of {limit}.',
        remedy: 'Enter the temperature the part must reach.',
        source: 'arithmetic',
      }),
    );
  }
  const thickness = part.form === 'disc' ? part.length : (part.outsideDiameter - part.insideDiameter) / 2;
  if (part.depthWanted !== null && thickness > 0 && part.depthWanted > thickness) {
    out.push(
      finding({
        code: 'dimension-impossible',
        severity: 'blocker',
        subject: 'part.depthWanted',
        figure: quantity(part.depthWanted, 'm'),
        limit: quantity(thickness, 'm'),
        template: 'The depth wanted, {figure}, is more than the part has: {limit}.',
        remedy: 'Leave the depth empty to heat the part through.',
        fixes: [],
        source: 'geometry',
      }),
    );
  }
  if (part.heatedLength !== null && part.heatedLength > part.length * (1 + 1e-9)) {
    out.push(
      finding({
        code: 'dimension-impossible',
        severity: 'blocker',
        subject: 'part.heatedLength',
        figure: quantity(part.heatedLength, 'm'),
        limit: quantity(part.length, 'm'),
        template: 'The heated length, {figure}, is more than the part’s length, {limit}.',
        remedy: 'Enter the length of the zone that must get hot.',
        fixes: [{ label: 'Heat the whole length', field: 'part.heatedLength', value: part.length }],
        source: 'geometry',
      }),
    );
  }
  if (
    coil.leads &&
    coil.leads.length > 0 &&
    context.geometry.section &&
    coil.leads.spacing < 2 * context.geometry.section.halfAxial
  ) {
    out.push(
      finding({
        code: 'dimension-impossible',
        severity: 'blocker',
        subject: 'coil.leads.spacing',
        figure: quantity(coil.leads.spacing, 'm'),
        limit: quantity(2 * context.geometry.section.halfAxial, 'm'),
        limitIsLeast: true,
        template: 'The leads, {figure} apart between centres, overlap: the tube is {limit} wide.',
        remedy: 'Set the leads further apart than the tube is wide.',
        source: 'geometry',
      }),
    );
  }
  return out;
};

/** turns-open: the number of turns is left to a proposal. */
export const openTurns: Rule = (context) => {
  const { winding } = context.requirement.coil;
  if (!('turns' in winding) || winding.turns !== null) return [];
  return [
    finding({
      code: 'turns-open',
      severity: 'blocker',
      subject: 'coil.winding.turns',
      template: 'The number of turns is open: no figure can be given before one is chosen.',
      remedy: 'Ask for proposals and take one, or enter the turns.',
      source: 'definition of the coil',
    }),
  ];
};

/** turns-touch: neighbouring turns touch, or nearly do. */
export const touchingTurns: Rule = (context) => {
  // Leads that overlap are said by their own sizes.
  const refused = problemsOf(context).find(
    (problem) => problem.code === 'turns-overlap' && !problem.field.startsWith('coil.leads'),
  );
  const gap = context.mechanics?.clearanceBetweenTurns ?? null;
  const tolerance = context.requirement.coil.pitchTolerance ?? 0.3e-3;
  const { winding, insulation } = context.requirement.coil;
  const pitchField = 'pitch' in winding ? 'coil.winding.pitch' : 'coil.winding';
  if (refused) {
    const size = context.geometry.section ? 2 * context.geometry.section.halfAxial : null;
    return [
      finding({
        code: 'turns-touch',
        severity: 'blocker',
        subject: pitchField,
        figure: 'pitch' in winding ? quantity(winding.pitch, 'm') : null,
        limit: size === null ? null : quantity(size, 'm'),
        limitIsLeast: true,
        template: refused.message.replaceAll('{', '(').replaceAll('}', ')'),
        remedy: 'Widen the pitch: turns that touch short the coil.',
        fixes:
          size === null || !('pitch' in winding)
            ? []
            : [{ label: 'Pitch of 1.25 tube widths', field: pitchField, value: round(size * 1.25) }],
        source: 'geometry',
      }),
    ];
  }
  const needed = tolerance + 2 * (insulation.kind === 'none' ? 0 : insulation.thickness);
  if (gap === null || gap >= needed) return [];
  return [
    finding({
      code: 'turns-touch',
      severity: 'caution',
      subject: pitchField,
      figure: quantity(gap, 'm'),
      limit: quantity(needed, 'm'),
      limitIsLeast: true,
      template:
        'The clearance of {figure} between turns is below {limit}: the pitch tolerance and the insulation can close it.',
      remedy: 'Widen the pitch, or thin the insulation.',
      source: 'sum of tolerances',
    }),
  ];
};

const round = (metres: number) => Math.round(metres * 1e5) / 1e5;

/** mass-disagrees: the weighed mass does not fit the dimensions. */
export const disagreeingMass: Rule = (context) => {
  const { part } = context.requirement;
  const { material } = context.geometry;
  if (part.weighedMass === null || !material || part.form === 'drawing') return [];
  const volume = (Math.PI / 4) * (part.outsideDiameter ** 2 - part.insideDiameter ** 2) * part.length;
  const mass = volume * material.density;
  if (!(mass > 0) || Math.abs(part.weighedMass / mass - 1) <= 0.05) return [];
  return [
    finding({
      code: 'mass-disagrees',
      severity: 'caution',
      subject: 'part.weighedMass',
      figure: quantity(part.weighedMass, 'kg'),
      limit: quantity(mass, 'kg'),
      template: 'The part weighs {figure}, but its dimensions and material give {limit}.',
      remedy: `Check diameter, length${part.insideDiameter > 0 ? ', bore' : ''} and material; energy and time go with the mass.`,
      source: 'volume × density',
    }),
  ];
};

/** outside-method: shapes and cases the solver does not cover, with what is missing. */
export const outsideMethod: Rule = (context) => {
  const { coil, part, process } = context.requirement;
  const out: Finding[] = [];
  const say = (subject: string, template: string, remedy: string) =>
    out.push(
      finding({
        code: 'outside-method',
        severity: 'caution',
        subject,
        template,
        remedy,
        source: 'range of the method',
      }),
    );
  const shape = coil.winding.shape;
  const round = ['helix', 'conical', 'stepped', 'pancake', 'single-turn', 'bore'].includes(shape);
  if (shape === 'drawing') {
    say(
      'coil.winding.shape',
      'A coil by drawing is not computed: no electrical figures, no bank ladder.',
      'Describe it by the nearest shape to get figures.',
    );
  } else if (!round) {
    say(
      'coil.winding.shape',
      `A ${shape.replace('-', ' ')} coil is computed without the part: only its bare figures are given, no loaded frequency, power or ladder.`,
      'Agree a trial on the machine, or an inductance with the part measured on a like coil.',
    );
  }
  if (part.form === 'drawing') {
    say(
      'part.form',
      'A part by drawing is not computed: only the bare coil’s figures are given.',
      'Enter the cylinder, tube or disc that the heated zone resembles.',
    );
  }
  if (process.mode !== 'single-shot') {
    say(
      'process.mode',
      `${process.mode === 'scan' ? 'Scanning' : 'Integral quench'} is outside the method: the figures are those of the coil standing still over the zone.`,
      'Take frequency and power as a guide; set the speed by trial.',
    );
  }
  for (const problem of problemsOf(context)) {
    if (codes[problem.code] !== 'outside-method' || !round || shape === 'drawing') continue;
    say(
      problem.field,
      problem.message.replaceAll('{', '(').replaceAll('}', ')'),
      'Simplify the shape or split the coil.',
    );
  }
  const { sanity } = context;
  if (sanity && withinCheapRange(context) && Math.abs(sanity.difference) > 0.1) {
    out.push(
      finding({
        code: 'outside-method',
        severity: 'caution',
        subject: 'coil.winding',
        figure: quantity(Math.abs(sanity.difference), '1'),
        limit: quantity(0.1, '1'),
        template:
          'A second, cheap formula differs from the field solution by {figure:%} for the bare inductance; above {limit:%} one of them is out of its range.',
        remedy: 'Check the sizes; with unusual proportions trust the measurement of a first coil.',
        source: 'ring-stack formula fitted to the field solution',
      }),
    );
  }
  return out;
};

/** Coils the cheap formula was fitted to: cylinders and cones of round tube. */
function withinCheapRange(context: CheckContext): boolean {
  const { winding, tube } = context.requirement.coil;
  return tube.kind === 'round' && ['helix', 'conical', 'stepped', 'bore'].includes(winding.shape);
}

/** part-does-not-couple: a material without eddy currents. */
export const notCoupling: Rule = (context) => {
  const { material } = context.geometry;
  if (!material || material.conducts) return [];
  return [
    finding({
      code: 'part-does-not-couple',
      severity: 'blocker',
      subject: 'part.material',
      template: `${material.name || 'The part'} does not conduct: the field heats nothing in it.`,
      remedy: 'Heat it through a susceptor (graphite or steel) and enter the susceptor as the part.',
      source: 'induction heats by eddy currents',
    }),
  ];
};

/** part-touches-coil: copper and part meet, cold or hot. */
export const touchingPart: Rule = (context) => {
  const refused = problemsOf(context).find((problem) => problem.code === 'part-overlaps-coil');
  const subject = 'part.outsideDiameter';
  if (refused) {
    return [
      finding({
        code: 'part-touches-coil',
        severity: 'blocker',
        safety: true,
        subject,
        template: refused.message.replaceAll('{', '(').replaceAll('}', ')'),
        remedy: 'Open the coil, or check both diameters and the position of the part.',
        source: 'geometry',
      }),
    ];
  }
  const hot = context.mechanics?.radialClearanceHot ?? null;
  if (hot === null || hot > 0) return [];
  return [
    finding({
      code: 'part-touches-coil',
      severity: 'blocker',
      safety: true,
      subject,
      figure: quantity(hot, 'm'),
      limit: quantity(0, 'm'),
      template: 'The hot part with its runout touches the copper: the clearance ends at {figure}.',
      remedy: `Open the coil by at least ${plural(2 * Math.ceil(-hot * 1e3 + 1), 'millimetre')}, or reduce the runout.`,
      source: 'thermal expansion and runout',
    }),
  ];
};
