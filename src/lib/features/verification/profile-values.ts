import type { ShopCapabilities } from '../../domain/verification.ts';
import type { UnitSet } from '../../induction/units/dimensions.ts';
import { formatField } from '../../induction/units/format-quantity.ts';

export interface ProfileValues {
  text: Record<string, string>;
  lists: Record<string, string[]>;
}

interface Profile {
  statement: string;
  capabilities: ShopCapabilities;
  worksAddress: {
    name: string;
    line1: string;
    line2: string;
    postalCode: string;
    city: string;
    region: string;
    country: string;
  };
}

/** What stands in the form: what was saved last, or the empty form with the company's name. */
export function profileValues(profile: Profile | null, unitSet: UnitSet, companyName: string): ProfileValues {
  const capabilities = profile?.capabilities;
  const address = profile?.worksAddress;
  const length = (value: number | null | undefined) => formatField(value ?? null, 'length', unitSet);
  return {
    text: {
      statement: profile?.statement ?? '',
      worksName: address?.name ?? companyName,
      worksLine1: address?.line1 ?? '',
      worksLine2: address?.line2 ?? '',
      worksPostalCode: address?.postalCode ?? '',
      worksCity: address?.city ?? '',
      worksRegion: address?.region ?? '',
      worksCountry: address?.country ?? '',
      tubeMin: length(capabilities?.tubeMin),
      tubeMax: length(capabilities?.tubeMax),
      coilDiameterMax: length(capabilities?.coilDiameterMax),
      coilLengthMax: length(capabilities?.coilLengthMax),
    },
    lists: {
      shapes: capabilities?.shapes ?? [],
      work: capabilities?.work ?? [],
      tests: capabilities?.tests ?? [],
    },
  };
}
