import DxfParser, {
  type IArcEntity,
  type ICircleEntity,
  type ILineEntity,
  type ITextEntity,
} from 'dxf-parser';
import { describe, expect, test } from 'vitest';
import { coilDrawing } from './coil-drawing.ts';
import { coilDxf } from './dxf.ts';
import { coilOf, sampleCoil, samplePart, sampleWindings } from './requirement-samples.ts';

// Read back with a parser that is not the writer's.
function read(text: string) {
  const parsed = new DxfParser().parseSync(text);
  if (!parsed) throw new Error('the parser found nothing');
  return parsed;
}

describe('the DXF of a helix', () => {
  const drawing = coilDrawing({ coil: sampleCoil, part: samplePart });
  const dxf = read(coilDxf(drawing));

  test('is in millimetres', () => {
    // $INSUNITS 4 = millimetres (DXF reference, header section).
    expect(dxf.header.$INSUNITS).toBe(4);
  });

  test('has the cut tubes as circles of 10 mm at the places of the drawing', () => {
    const tubes = dxf.entities.filter(
      (entity): entity is ICircleEntity => entity.type === 'CIRCLE' && entity.layer === 'outline',
    );
    const outer = tubes.filter(
      (tube) => Math.abs(tube.radius - 5) < 1e-9 && tube.center.y > 0 && Math.abs(tube.center.x) < 27,
    );
    expect(outer.map((tube) => tube.center.x).sort((a, b) => a - b)).toEqual(
      [-26, -13, 0, 13, 26].map((x) => expect.closeTo(x, 6)),
    );
    expect(outer.every((tube) => Math.abs(tube.center.y - 22.5) < 1e-6)).toBe(true);
  });

  test('has the part as lines on a layer of their own', () => {
    const part = dxf.entities.filter(
      (entity): entity is ILineEntity => entity.type === 'LINE' && entity.layer === 'part',
    );
    const xs = part.flatMap((entity) => entity.vertices.map((vertex) => vertex.x));
    expect(Math.min(...xs)).toBeCloseTo(-45, 6);
    expect(Math.max(...xs)).toBeCloseTo(45, 6);
  });

  test('letters the opening with the code for the diameter sign', () => {
    const words = dxf.entities
      .filter((entity) => entity.type === 'TEXT')
      .map((entity) => (entity as ITextEntity).text);
    expect(words).toContain('%%c 35 mm');
    expect(words).toContain('13 mm');
  });
});

test('a racetrack has true arcs at its corners', () => {
  const winding = sampleWindings.find((candidate) => candidate.shape === 'racetrack');
  if (!winding) throw new Error('no racetrack among the samples');
  const dxf = read(coilDxf(coilDrawing({ coil: coilOf(winding), part: samplePart })));
  const arcs = dxf.entities.filter(
    (entity): entity is IArcEntity => entity.type === 'ARC' && entity.layer === 'outline',
  );
  const radii = [...new Set(arcs.map((arc) => Number(arc.radius.toFixed(6))))].sort((a, b) => a - b);
  expect(radii).toEqual([20, 30]);
});

test.each(sampleWindings.map((winding) => [winding.shape, winding] as const))(
  'the DXF of a %s can be read',
  (_shape, winding) => {
    const dxf = read(coilDxf(coilDrawing({ coil: coilOf(winding), part: samplePart })));
    expect(dxf.entities.length).toBeGreaterThan(10);
  },
);

test('the same drawing gives the same file', () => {
  const make = () => coilDxf(coilDrawing({ coil: sampleCoil, part: samplePart }));
  expect(make()).toBe(make());
});

test('a drawing with nothing to show still is a file that can be read', () => {
  const empty = coilDxf(coilDrawing({ coil: coilOf({ shape: 'drawing', note: '' }), part: samplePart }));
  expect(read(empty).entities).toEqual([]);
});
