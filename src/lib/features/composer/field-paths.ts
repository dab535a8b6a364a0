/** From the paths of findings and fixes (those of the API) to the fields of the form. */
import type { FieldSpec } from '$lib/schemas/forms/field-spec.ts';

const moved: Record<string, string> = {
  'machine.transformer.fittedTap': 'machine.transformer.fitted',
  'machine.transformer': 'machine.hasTransformer',
  'machine.fixed.calibration': 'machine.isCalibrated',
  'machine.connection': 'machine.connection.kind',
  'part.material': 'part.material.id',
  'coil.leads': 'coil.leads.length',
  'coil.winding': 'coil.winding.shape',
  'coil.tube': 'coil.tube.kind',
  'coil.handing': 'coil.handing.windingDirection',
  'coil.support': 'coil.support.kind',
  'coil.insulation': 'coil.insulation.kind',
  'machine.bank': 'machine.bank.kind',
};

export function formPath(path: string): string {
  return moved[path] ?? path;
}

/**
 * The field a finding is about: the very one, one below it, or the nearest above it; the first of the
 * section where nothing fits.
 */
export function fieldOfSubject(subject: string, fields: readonly FieldSpec[]): FieldSpec | undefined {
  for (let path = formPath(subject); path !== ''; path = path.slice(0, Math.max(path.lastIndexOf('.'), 0))) {
    const wanted = formPath(path);
    const exact = fields.find((field) => field.path === wanted);
    if (exact) return exact;
    const below = fields.find((field) => field.path.startsWith(`${wanted}.`));
    if (below) return below;
  }
  return undefined;
}
