import {
  capabilityLists,
  fabricatorProfileInput,
  listsOf,
  type FabricatorProfileInput,
} from '../../src/lib/schemas/forms/verification.ts';

/** What an invented shop declares, read from a form as the page would post it. */
export function aProfile(change: Record<string, string> = {}): FabricatorProfileInput {
  const form = new FormData();
  const values = {
    statement: 'Brazed and bent inductors from copper tube, one to fifty pieces.',
    worksName: 'Fennel Row Coils',
    worksLine1: '4 Fennel Row',
    worksPostalCode: '00000',
    worksCity: 'Anyford',
    worksCountry: 'gb',
    tubeMin: '4',
    tubeMax: '3/4 in',
    coilDiameterMax: '600 mm',
    ...change,
  };
  for (const [name, value] of Object.entries(values)) form.append(name, value);
  for (const shape of ['helix', 'pancake']) form.append('shapes', shape);
  form.append('tests', 'inductance');
  return fabricatorProfileInput('metric').parse(listsOf(form, capabilityLists));
}
