import { expect, test } from 'vitest';
import { ownPath } from './own-path.ts';

test('only own paths are gone on to', () => {
  expect(ownPath('/orders/1?tab=money', '/desk')).toBe('/orders/1?tab=money');
  for (const bad of [
    '//evil.example',
    '/\\evil.example',
    'https://evil.example',
    'orders',
    '',
    null,
    undefined,
    '/a\nb',
    '/\t/evil.example',
    '/a\\b',
  ]) {
    expect(ownPath(bad, '/desk'), String(bad)).toBe('/desk');
  }
});
