/** The library's materials as choices of a form. */
import { libraryMaterials as library } from '../../induction/materials/library.ts';

export const libraryMaterials: readonly (readonly [string, string])[] = library().map((material) => [
  material.id,
  material.name,
]);

export function materialName(id: string): string {
  return libraryMaterials.find(([known]) => known === id)?.[1] ?? id;
}
