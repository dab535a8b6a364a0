import { expect, test } from 'vitest';
import { csvCell, csvOf } from './csv.ts';

test.each([
  ['=1+1', "'=1+1"],
  ['+49 30', "'+49 30"],
  ['-rm', "'-rm"],
  ['@sum', "'@sum"],
  ['\tx', "'\tx"],
  ['\rx', '"\'\rx"'],
  ['-12.50', '-12.50'],
  ['12.50', '12.50'],
  ['plain', 'plain'],
  ['a,b', '"a,b"'],
  ['say "so"', '"say ""so"""'],
  ['two\nlines', '"two\nlines"'],
])('cell %j is written %j', (value, written) => {
  expect(csvCell(value)).toBe(written);
});

test('rows end with CR LF', () => {
  expect(csvOf(['a', 'b'], [['1', '=x']])).toBe("a,b\r\n1,'=x\r\n");
});
