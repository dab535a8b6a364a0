import { MU0 } from '../../constants/physical.ts';
import { bendingSize } from '../../shop/path.ts';
import { testPressureFactor } from '../../shop/pressure.ts';
import { findStock } from '../../shop/tube-stock.ts';
import type { Rule } from '../context.ts';
import { workingPressure } from '../mechanics-figures.ts';
import { commonPractice, finding, quantity } from './finding.ts';

/** Resistance of a wall of t skin depths over that of a thick one: (sinh 2t + sin 2t)/(cosh 2t − cos 2t). */
export const wallFactor = (t: number): number =>
  (Math.sinh(2 * t) + Math.sin(2 * t)) / (Math.cosh(2 * t) - Math.cos(2 * t));

/** tube-wall-thin: the wall against the skin depth of copper. */
export const thinWall: Rule = (context) => {
  const { skin } = context;
  const { wall } = context.requirement.coil.tube;
  if (!skin) return [];
  const t = wall / skin.copper.value;
  if (t >= 1.5) return [];
  return [
    finding({
      code: 'tube-wall-thin',
      severity: t < 1.1 ? 'caution' : 'note',
      subject: 'coil.tube.wall',
      figure: quantity(t, '1'),
      limit: quantity(t < 1.1 ? 1.1 : 1.5, '1'),
      limitIsLeast: true,
      template:
        'The wall of {wall} is {figure} skin depths of copper: its resistance is {factor} times that of a thick wall.',
      values: { wall: quantity(wall, 'm'), factor: quantity(wallFactor(t), '1') },
      remedy: 'A wall of about 1.6 skin depths has the least resistance; more than two gains nothing.',
      fixes: [
        {
          label: 'Wall of 1.6 skin depths',
          field: 'coil.tube.wall',
          value: Math.ceil(1.6e4 * skin.copper.value) / 1e4,
        },
      ],
      source: `plane conductor of finite thickness, current on one side (µ0 = ${MU0.toPrecision(5)} H/m)`,
    }),
  ];
};

/** bend-too-tight: centre-line radius over tube size. */
export const tightBend: Rule = (context) => {
  const { path, geometry } = context;
  if (!path || !geometry.section) return [];
  const ratio = path.bendRadius / bendingSize(geometry.section);
  if (ratio >= 2) return [];
  const impossible = ratio < 1.25;
  return [
    finding({
      code: 'bend-too-tight',
      severity: impossible ? 'blocker' : 'caution',
      subject: 'coil.tube',
      figure: quantity(ratio, '1'),
      limit: quantity(impossible ? 1.25 : 2, '1'),
      limitIsLeast: true,
      template: impossible
        ? 'The tube is bent to {figure} times its size: below {limit} annealed copper tears on the outside.'
        : 'The tube is bent to {figure} times its size: below {limit} it needs filling and a mandrel, and its bore flattens.',
      remedy: 'Take a smaller tube, or make the tight turns from machined pieces, brazed.',
      source: `outer fibre strain d/(2R) against 40 % elongation; ${commonPractice} 2 to 3 with filling`,
    }),
  ];
};

/** tube-not-stocked: the size is not in the table of standards. */
export const notStocked: Rule = (context) => {
  const { tube } = context.requirement.coil;
  if (!context.geometry.section) return [];
  const answer = findStock(tube);
  if (answer.stocked) return [];
  const { nearest } = answer;
  return [
    finding({
      code: 'tube-not-stocked',
      severity: 'note',
      subject: 'coil.tube',
      template: nearest
        ? `The tube is not a size of the standards we know; the nearest is {size} × {wall} (${nearest.standard}).`
        : 'Square and rectangular tube is drawn to order: ask for the lead time.',
      values: nearest
        ? { size: quantity(nearest.outsideDiameter, 'm'), wall: quantity(nearest.wall, 'm') }
        : {},
      remedy: nearest
        ? 'Take the nearest size, or allow for tube drawn to order.'
        : 'Allow for tube drawn to order.',
      fixes: nearest
        ? [
            {
              label: 'Take the nearest size',
              field: 'coil.tube.outsideDiameter',
              value: nearest.outsideDiameter,
            },
            { label: 'Take its wall', field: 'coil.tube.wall', value: nearest.wall },
          ]
        : [],
      source: 'ASTM B280, B88, B88M',
    }),
  ];
};

/** working-pressure-high: supply pressure against the tube. */
export const workingPressureHigh: Rule = (context) => {
  const rating = context.mechanics?.workingPressureRating;
  if (!rating) return [];
  const pressure = workingPressure(context.requirement);
  if (pressure <= rating.low) return [];
  return [
    finding({
      code: 'working-pressure-high',
      severity: pressure > rating.value ? 'blocker' : 'caution',
      safety: true,
      subject: 'coil.tube',
      figure: quantity(pressure, 'Pa'),
      limit: quantity(rating.value, 'Pa'),
      template: 'The water stands at {figure}; the annealed tube is good for {limit}.',
      remedy: 'A thicker wall, a round tube, or a pressure reducer.',
      source: rating.method,
    }),
  ];
};

/** test-pressure-high: the hydrostatic test against 1.5 times the rating. */
export const testPressureHigh: Rule = (context) => {
  const { mechanics } = context;
  if (!mechanics) return [];
  const limit = testPressureFactor * mechanics.workingPressureRating.value;
  if (mechanics.testPressure <= limit) return [];
  return [
    finding({
      code: 'test-pressure-high',
      severity: 'blocker',
      safety: true,
      subject: 'acceptance',
      figure: quantity(mechanics.testPressure, 'Pa'),
      limit: quantity(limit, 'Pa'),
      template: 'The test at {figure} is above {limit}, 1.5 times what the annealed tube is good for.',
      remedy: 'Test at 1.5 times the working pressure, or take a thicker wall.',
      source: `${commonPractice}: hydrostatic test at 1.5 times the working pressure`,
    }),
  ];
};

/** leads-dominate: leads above a fifth of the tank inductance. */
export const leadsDominate: Rule = (context) => {
  const { leads, fittedRow } = context;
  if (!leads || !fittedRow) return [];
  const { circuit, points } = fittedRow;
  const n2 = circuit.transformer && circuit.bankSide === 'primary' ? circuit.ratio ** 2 : 1;
  const share = (n2 * leads.inductance.value) / points.hot.branch.inductance;
  if (share <= 0.2) return [];
  return [
    finding({
      code: 'leads-dominate',
      severity: 'caution',
      subject: 'coil.leads',
      figure: quantity(share, '1'),
      limit: quantity(0.2, '1'),
      template:
        'The leads, {inductance}, make up {figure:%} of the tank’s inductance: they take voltage and move the frequency.',
      values: { inductance: quantity(leads.inductance.value, 'H') },
      remedy: 'Shorten the leads, set them closer, or make them of flat bars.',
      source: commonPractice,
    }),
  ];
};
