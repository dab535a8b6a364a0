/** What a machine's page shows: what is stored, or what came back from a refused save. */
export interface MachinePageState {
  values: Record<string, string>;
  unitSet: 'metric' | 'inch';
  fields: Record<string, string>;
  message: string | null;
  failed: boolean;
}

type Returned =
  | { rows: Record<string, string>; unitSet: 'metric' | 'inch' }
  | { values: Record<string, string>; fields: Record<string, string>; message: string }
  | null
  | undefined;

export function machineFormState(
  returned: Returned,
  stored: Record<string, string>,
  unitSet: 'metric' | 'inch',
): MachinePageState {
  const clean = { fields: {}, message: null, failed: false };
  if (!returned) return { values: stored, unitSet, ...clean };
  if ('rows' in returned) return { values: returned.rows, unitSet: returned.unitSet, ...clean };
  return {
    values: returned.values,
    unitSet: returned.values['unitSet'] === 'inch' ? 'inch' : 'metric',
    fields: returned.fields,
    message: returned.message,
    failed: true,
  };
}
