/** The drawing as DXF in millimetres, one layer per kind of line, views side by side. */
import makerjs from 'makerjs';
import type { DrawingModel, DrawingView, LineKind, Primitive } from './model.ts';
import { textLength } from './primitives.ts';

/** AutoCAD colour index per layer; 7 is black or white, whichever shows. */
const layerColours: Record<LineKind, number> = {
  outline: 7,
  behind: 8,
  open: 8,
  centre: 1,
  part: 5,
  heated: 1,
  lead: 7,
  fixture: 6,
  dimension: 3,
  water: 4,
};

function addPrimitive(
  model: makerjs.IModel,
  primitive: Primitive,
  name: string,
  at: readonly [number, number],
  textHeight: number,
): void {
  const [dx, dy] = at;
  const paths = (model.paths ??= {});
  switch (primitive.type) {
    case 'line': {
      const path = new makerjs.paths.Line(
        [primitive.x1 + dx, primitive.y1 + dy],
        [primitive.x2 + dx, primitive.y2 + dy],
      );
      if (Math.hypot(primitive.x2 - primitive.x1, primitive.y2 - primitive.y1) > 0) paths[name] = path;
      return;
    }
    case 'circle':
      if (primitive.r > 0)
        paths[name] = new makerjs.paths.Circle([primitive.cx + dx, primitive.cy + dy], primitive.r);
      return;
    case 'arc':
      paths[name] = new makerjs.paths.Arc(
        [primitive.cx + dx, primitive.cy + dy],
        primitive.r,
        primitive.startDeg,
        primitive.endDeg,
      );
      return;
    case 'polyline': {
      const points = primitive.closed
        ? [...primitive.points, ...primitive.points.slice(0, 1)]
        : primitive.points;
      points.slice(1).forEach(([x, y], i) => {
        const [fromX, fromY] = points[i] ?? [x, y];
        if (Math.hypot(x - fromX, y - fromY) > 0)
          paths[`${name}-${i}`] = new makerjs.paths.Line([fromX + dx, fromY + dy], [x + dx, y + dy]);
      });
      return;
    }
    case 'text': {
      const angle = (primitive.turnDeg * Math.PI) / 180;
      const length = textLength(primitive.text, textHeight);
      const start = primitive.anchor === 'start' ? 0 : primitive.anchor === 'middle' ? -length / 2 : -length;
      const point = (along: number): [number, number] => [
        primitive.x + dx + along * Math.cos(angle) - (textHeight / 2) * Math.sin(angle),
        primitive.y + dy + along * Math.sin(angle) + (textHeight / 2) * Math.cos(angle),
      ];
      (model.models ??= {})[name] = {
        layer: primitive.kind,
        // makerjs centres a caption on its anchor line; DXF TEXT has only plain characters.
        caption: {
          text: plainText(primitive.text),
          anchor: new makerjs.paths.Line(point(start), point(start + length)),
        },
      };
    }
  }
}

/** DXF of the older kind carries ASCII: the diameter sign and the degree have codes of their own. */
function plainText(text: string): string {
  return text
    .replaceAll('Ø', '%%c')
    .replaceAll('°', '%%d')
    .replaceAll('±', '%%p')
    .normalize('NFKD')
    .replace(/[^\x20-\x7e]/g, '');
}

function viewModel(view: DrawingView, at: readonly [number, number], textHeight: number): makerjs.IModel {
  const byLayer = new Map<LineKind, makerjs.IModel>();
  view.primitives.forEach((primitive, i) => {
    let layer = byLayer.get(primitive.kind);
    if (!layer) byLayer.set(primitive.kind, (layer = { layer: primitive.kind }));
    addPrimitive(layer, primitive, `${primitive.type}-${i}`, at, textHeight);
  });
  return { models: Object.fromEntries(byLayer) };
}

/** The whole drawing as the text of a DXF file; millimetres, the first view with its origin at 0, 0. */
export function coilDxf(drawing: DrawingModel): string {
  const models: Record<string, makerjs.IModel> = {};
  let x = 0;
  drawing.views.forEach((view, i) => {
    const left = i === 0 ? 0 : x - view.bounds.x;
    models[view.id] = viewModel(view, [left, 0], drawing.textHeight);
    x = left + view.bounds.x + view.bounds.width + drawing.textHeight * 4;
  });
  const layerOptions = Object.fromEntries(
    Object.entries(layerColours).map(([name, color]) => [name, { color, fontSize: drawing.textHeight }]),
  );
  return makerjs.exporter.toDXF(
    { models, units: makerjs.unitType.Millimeter },
    { units: makerjs.unitType.Millimeter, fontSize: drawing.textHeight, layerOptions },
  );
}
