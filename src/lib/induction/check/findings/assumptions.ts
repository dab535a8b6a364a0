import type { Rule } from '../context.ts';
import { shopTolerances } from '../sensitivity.ts';
import type { Finding, Quantity } from '../types.ts';
import { commonPractice, finding, quantity } from './finding.ts';

/** assumed-value: an input is not known; the default, its band and how to find out. */
export const assumedValues: Rule = (context) => {
  const out: Finding[] = context.assumptions.map((a) => {
    const values: Record<string, Quantity> = a.value ? { value: a.value, band: quantity(a.band, '1') } : {};
    return finding({
      code: 'assumed-value',
      severity: a.severity,
      subject: a.field,
      figure: a.value,
      template: a.value
        ? `The ${a.name} is not known: {value} ±{band:%} is taken.`
        : a.taken
          ? `The ${a.name} is not known: ${a.taken} is taken.`
          : `The ${a.name} is not known and is left out of the figures.`,
      values,
      remedy: a.howToFind,
      source: commonPractice,
    });
  });
  const { coil, part } = context.requirement;
  const tolerance = (field: string, name: string, value: number) =>
    out.push(
      finding({
        code: 'assumed-value',
        severity: 'note',
        subject: field,
        figure: quantity(value, 'm'),
        template: `No tolerance of the ${name} is entered: ±{value} is taken for the bands.`,
        values: { value: quantity(value, 'm') },
        remedy: 'Enter the tolerance you will ask of the shop or have on your parts.',
        source: commonPractice,
      }),
    );
  if (coil.diameterTolerance === null)
    tolerance('coil.diameterTolerance', 'coil opening', shopTolerances.diameter);
  if (coil.pitchTolerance === null && 'pitch' in coil.winding)
    tolerance('coil.pitchTolerance', 'pitch', shopTolerances.pitch);
  if (part.diameterTolerance === null)
    tolerance('part.diameterTolerance', 'part diameter', shopTolerances.partDiameter);
  const { material } = context.geometry;
  if (material && material.records.resistivity.standing === 'memory') {
    const scatter = material.records.resistivity.uncertainty;
    out.push(
      finding({
        code: 'assumed-value',
        severity: 'note',
        subject: 'part.material',
        figure: quantity(scatter, '1'),
        template: `The resistivity of ${material.name} is a value from memory: ±{figure:%} is taken.`,
        remedy: 'Enter the material with the values of your supplier where it matters.',
        source: material.records.resistivity.source,
      }),
    );
  }
  if (coil.leads === null) {
    out.push(
      finding({
        code: 'assumed-value',
        severity: 'caution',
        subject: 'coil.leads',
        template:
          'The leads are not entered: the figures end at the last turn, and leads of usual length lower the frequency.',
        remedy: 'Enter length and spacing of the leads up to the contact face.',
        source: 'inductance of a go-and-return pair, (µ0/π)·arcosh(s/d) per metre',
      }),
    );
  }
  return out;
};
