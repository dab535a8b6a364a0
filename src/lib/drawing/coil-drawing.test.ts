import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import type { Winding } from '../induction/check/types.ts';
import { coilDrawing } from './coil-drawing.ts';
import type { DrawingModel, Primitive } from './model.ts';
import { coilOf, sampleCoil, samplePart, sampleWindings } from './requirement-samples.ts';

const viewOf = (model: DrawingModel, id: string) => {
  const view = model.views.find((candidate) => candidate.id === id);
  if (!view) throw new Error(`no view ${id}`);
  return view;
};
const circles = (primitives: Primitive[]) => primitives.filter((p) => p.type === 'circle');
const texts = (model: DrawingModel) =>
  model.views.flatMap((view) => view.primitives.flatMap((p) => (p.type === 'text' ? [p.text] : [])));

describe('a helix of 5 turns, 35 mm opening, 10 mm tube, pitch 13 mm', () => {
  const model = coilDrawing({ coil: sampleCoil, part: samplePart });
  const cuts = circles(viewOf(model, 'section').primitives).filter((p) => p.kind === 'outline' && p.r === 5);

  test('is cut five times above the axis, one pitch apart, with the tube on the opening', () => {
    const above = cuts.filter((cut) => cut.cy > 0).map((cut) => [cut.cx, cut.cy]);
    // Centre line at 35/2 + 10/2 = 22.5 mm; five turns about the middle.
    expect(above).toEqual([-26, -13, 0, 13, 26].map((x) => [expect.closeTo(x, 9), expect.closeTo(22.5, 9)]));
  });

  test('is cut six times below, half a pitch further, since it starts and ends there', () => {
    const below = cuts.filter((cut) => cut.cy < 0).map((cut) => cut.cx);
    expect(below).toEqual([-32.5, -19.5, -6.5, 6.5, 19.5, 32.5].map((x) => expect.closeTo(x, 9)));
  });

  test('letters the measures of the requirement', () => {
    expect(texts(model)).toEqual(
      expect.arrayContaining([
        '13 mm',
        '62 mm',
        'Ø 35 mm',
        'Ø 25 mm',
        '90 mm',
        'heated 50 mm',
        'Ø 55 mm',
        'gap 5 mm',
        '60 mm',
        '20 mm',
      ]),
    );
  });

  test('says the same in the table, in metres', () => {
    const row = (name: string) => model.dimensions.find((candidate) => candidate.name === name)?.value;
    expect(row('Opening, first turn')).toBeCloseTo(0.035, 12);
    expect(row('Length over the copper')).toBeCloseTo(0.062, 12);
    expect(row('Gap to the part, radial')).toBeCloseTo(0.005, 12);
    expect(row('Turns')).toBe(5);
  });

  test('letters in inches when asked', () => {
    const inch = coilDrawing(
      { coil: sampleCoil, part: { ...samplePart, outsideDiameter: 0.0254 } },
      { units: 'inch' },
    );
    expect(texts(inch)).toContain('Ø 1 in');
  });

  test('leans the other way when wound left-handed', () => {
    const left = coilDrawing({
      coil: { ...sampleCoil, handing: { ...sampleCoil.handing, windingDirection: 'left' } },
      part: samplePart,
    });
    const behind = (drawing: DrawingModel) =>
      viewOf(drawing, 'section').primitives.filter((p) => p.kind === 'behind');
    expect(behind(left)).not.toEqual(behind(model));
  });
});

test.each(sampleWindings.map((winding) => [winding.shape, winding] as const))(
  'a %s can be drawn',
  (_shape, winding) => {
    const part =
      winding.shape === 'bore'
        ? { ...samplePart, outsideDiameter: 0.08, insideDiameter: 0.04, form: 'ring' as const }
        : samplePart;
    const model = coilDrawing({ coil: coilOf(winding), part });
    expect(model.views.length).toBeGreaterThan(0);
    for (const view of model.views) {
      expect(view.primitives.length).toBeGreaterThan(5);
      expect(Object.values(view.bounds).every(Number.isFinite)).toBe(true);
    }
  },
);

test('the opening follows from part and clearance where no diameter is given', () => {
  const winding: Winding = { shape: 'helix', insideDiameter: null, clearance: 0.004, turns: 3, pitch: 0.013 };
  expect(texts(coilDrawing({ coil: coilOf(winding), part: samplePart }))).toContain('Ø 33 mm');
});

test('a cone has the first and the last diameter that were given', () => {
  const winding: Winding = {
    shape: 'conical',
    insideDiameter: 0.034,
    endInsideDiameter: 0.06,
    turns: 4,
    pitch: 0.014,
  };
  expect(texts(coilDrawing({ coil: coilOf(winding), part: samplePart }))).toEqual(
    expect.arrayContaining(['Ø 34 mm', 'Ø 60 mm', '60 mm']),
  );
});

test('inside a part the leads leave along the axis, whatever was ticked', () => {
  const winding: Winding = { shape: 'bore', outsideDiameter: 0.034, clearance: null, turns: 4, pitch: 0.012 };
  const model = coilDrawing({
    coil: coilOf(winding),
    part: { ...samplePart, outsideDiameter: 0.08, insideDiameter: 0.04 },
  });
  expect(model.notes.join(' ')).toMatch(/only leave along the axis/);
});

test('open turns are drawn dashed and said to be open', () => {
  const winding: Winding = {
    shape: 'helix',
    insideDiameter: 0.035,
    clearance: null,
    turns: null,
    pitch: 0.013,
  };
  const model = coilDrawing({ coil: coilOf(winding), part: samplePart });
  expect(viewOf(model, 'section').primitives.some((p) => p.kind === 'open')).toBe(true);
  expect(model.notes.join(' ')).toMatch(/turns is open/);
  expect(model.dimensions.find((row) => row.name === 'Turns')?.text).toBe('open');
});

test('a coil by drawing gives no view and says why', () => {
  const model = coilDrawing({ coil: coilOf({ shape: 'drawing', note: 'see file' }), part: samplePart });
  expect(model.views).toEqual([]);
  expect(model.notes[0]).toMatch(/by drawing/);
});

test('fixture metal is drawn where it stands', () => {
  const model = coilDrawing({
    coil: sampleCoil,
    part: samplePart,
    fixture: {
      kind: 'support',
      material: 'steel',
      datum: '',
      contact: '',
      contactTemperatureC: null,
      metalParts: [
        { name: 'clamp', r: 0.06, z: 0.03, size: 0.012, material: { kind: 'library', id: 'c45' } },
      ],
      operatorDistance: null,
      acceptance: [],
    },
  });
  const clamp = circles(viewOf(model, 'section').primitives).find((p) => p.kind === 'fixture');
  expect(clamp).toMatchObject({ cx: 30, cy: 60, r: 6 });
});

test('whatever is typed, it draws what it can and never throws; every number it gives is finite', () => {
  const odd = fc.oneof(
    fc.constantFrom(0, -1, Number.NaN, Number.POSITIVE_INFINITY, 1e-12, 1e9, 0.01, 0.05, null),
    fc.double({ min: -0.2, max: 0.5 }),
  ) as fc.Arbitrary<number>;
  fc.assert(
    fc.property(
      fc.constantFrom(...sampleWindings),
      fc.array(odd, { minLength: 16, maxLength: 16 }),
      (sample, values) => {
        const scrambled: Record<string, unknown> = { ...sample };
        let i = 0;
        for (const key of Object.keys(scrambled)) {
          if (typeof scrambled[key] === 'number' || scrambled[key] === null) scrambled[key] = values[i++];
          else if (Array.isArray(scrambled[key])) scrambled[key] = [values[i++], values[i++]];
        }
        const model = coilDrawing({
          coil: coilOf(scrambled as unknown as Winding, {
            tube: { kind: 'round', outsideDiameter: values[10] as number, wall: values[11] as number },
            leads: { length: values[12] as number, spacing: values[13] as number },
            centreTap: true,
          }),
          part: {
            ...samplePart,
            outsideDiameter: values[14] as number,
            length: values[15] as number,
            insideDiameter: values[9] as number,
          },
        });
        const numbers = JSON.stringify(model, (_key, value: unknown) =>
          typeof value === 'number' && !Number.isFinite(value) ? 'BAD' : value,
        );
        expect(numbers).not.toContain('BAD');
      },
    ),
    { numRuns: 500 },
  );
});
