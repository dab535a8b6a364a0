import { expect, test } from 'vitest';
import { countryCodes, countryOptions, isCountryCode } from './countries.ts';

test('every country is there once, with a name', () => {
  expect(new Set(countryCodes).size).toBe(249);
  for (const { value, label } of countryOptions()) expect(label, value).not.toBe(value);
  expect(isCountryCode('DE')).toBe(true);
  expect(isCountryCode('EU')).toBe(false);
});
