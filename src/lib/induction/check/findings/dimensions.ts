/** dimension-impossible: sizes that contradict each other or are no numbers. */
import type { Rule } from '../context.ts';
import type { Finding, FindingCode } from '../types.ts';
import { finding, quantity } from './finding.ts';
import { problemCodes, problemsOf } from './problems.ts';

/** Codes that another rule says better. */
const elsewhere: FindingCode[] = [
  'turns-touch',
  'part-touches-coil',
  'turns-open',
  'outside-method',
  'part-does-not-couple',
];

/** Numbers that are none. */
const notNumbers: Rule = (context) =>
  context.geometry.notNumbers.map((path) =>
    finding({
      code: 'dimension-impossible',
      severity: 'blocker',
      subject: path,
      template: `The value at ${path} is not a number.`,
      remedy: 'Enter a number with its unit.',
      source: 'arithmetic',
    }),
  );

/** What the geometry refuses. */
const refusals: Rule = (context) => {
  const out: Finding[] = [];
  for (const problem of problemsOf(context)) {
    // Overlapping leads are said by their sizes below.
    const code = problemCodes[problem.code] ?? 'dimension-impossible';
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
  return out;
};

/** A target that is no heating. */
const targetBelowStart: Rule = (context) => {
  const { process } = context.requirement;
  const out: Finding[] = [];
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
  return out;
};

/** A depth the part does not have. */
const depthBeyondPart: Rule = (context) => {
  const { part } = context.requirement;
  const out: Finding[] = [];
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
  return out;
};

/** A heated zone longer than the part. */
const zoneBeyondPart: Rule = (context) => {
  const { part } = context.requirement;
  const out: Finding[] = [];
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
  return out;
};

/** Leads closer than the tube is wide. */
const leadsOverlap: Rule = (context) => {
  const { coil } = context.requirement;
  const out: Finding[] = [];
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

const checks: readonly Rule[] = [
  notNumbers,
  refusals,
  targetBelowStart,
  depthBeyondPart,
  zoneBeyondPart,
  leadsOverlap,
];

export const impossibleDimensions: Rule = (context) => checks.flatMap((one) => one(context));
