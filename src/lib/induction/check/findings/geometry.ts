import { plural } from './words.ts';
import type { CheckContext, Rule } from '../context.ts';
import type { Finding } from '../types.ts';
import { finding, quantity } from './finding.ts';
import { problemCodes, problemsOf } from './problems.ts';

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
    if (problemCodes[problem.code] !== 'outside-method' || !round || shape === 'drawing') continue;
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
