import { expect, test } from 'vitest';
import { deviceWords } from './user-agent.ts';

test('devices are named by browser and system', () => {
  expect(
    deviceWords(
      'Mozilla/5.0 (X11; Linux x86_64) AppleWebKit/537.36 (KHTML, like Gecko) Chrome/130.0.0.0 Safari/537.36',
    ),
  ).toBe('Chrome on Linux');
  expect(
    deviceWords(
      'Mozilla/5.0 (iPhone; CPU iPhone OS 17_5 like Mac OS X) AppleWebKit/605.1.15 (KHTML, like Gecko) Version/17.5 Mobile/15E148 Safari/604.1',
    ),
  ).toBe('Safari on iOS');
  expect(
    deviceWords('Mozilla/5.0 (Windows NT 10.0; Win64; x64; rv:128.0) Gecko/20100101 Firefox/128.0'),
  ).toBe('Firefox on Windows');
  expect(deviceWords(null)).toBe('Unknown device');
  expect(deviceWords('curl/8')).toBe('Other program');
});
