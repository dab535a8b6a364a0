import { expect, test } from 'vitest';
import { passwordProblem } from './password.ts';

test('passwords of the common list, and those with little put to them, are refused', () => {
  for (const common of [
    'password1234',
    'Password123456',
    'iloveyou1234',
    '123456789012',
    'aaaaaaaaaaaa',
    'longpasswordlongpassword',
  ]) {
    expect(passwordProblem(common), common).toMatch(/tried first/);
  }
});

test('twelve characters are enough and 128 are not too many, without rules for their make-up', () => {
  expect(passwordProblem('spiral kettle')).toBeUndefined();
  expect(passwordProblem('zinkblende ofen')).toBeUndefined();
  expect(passwordProblem('short twelv')).toMatch(/12 characters or more; this one has 11/);
  const long = 'kiln marble otter seven '.repeat(5) + 'endsnow!';
  expect([...long]).toHaveLength(128);
  expect(passwordProblem(long)).toBeUndefined();
  expect(passwordProblem(`${long}x`)).toMatch(/128 characters at most/);
});

test('the own name or address with little put to it is refused', () => {
  expect(passwordProblem('margarethe.brandt', ['margarethe.brandt@works.example'])).toMatch(/tried first/);
  expect(passwordProblem('coilyardcoilyard')).toMatch(/tried first/);
});

test('length is counted in characters, not in code units', () => {
  expect(passwordProblem('🔥🧲🔩🔧🔥🧲')).toMatch(/this one has 6/);
});
