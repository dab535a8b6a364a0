import { expect, test } from 'vitest';
import { doneOf, failureLines, failureOf } from './outcome.ts';

const failure = {
  code: 'invalid-input',
  message: 'Some of what was entered needs another look.',
  fields: { email: 'Enter an e-mail address.' },
  values: { email: 'x' },
  form: 'invite',
  data: null,
};

test('a failure belongs to its form', () => {
  expect(failureOf(failure, 'invite')?.values['email']).toBe('x');
  expect(failureOf(failure, 'roles')).toBeNull();
  expect(failureOf(failure)).not.toBeNull();
  for (const none of [null, undefined, {}, { done: 'x', words: 'y' }]) expect(failureOf(none)).toBeNull();
});

test('the summary links to the fields by the ids they carry, or says the message alone', () => {
  expect(failureLines(failure)).toEqual([{ message: 'Enter an e-mail address.', href: '#field-email' }]);
  expect(failureLines(failure, 'invite')).toEqual([
    { message: 'Enter an e-mail address.', href: '#field-invite-email' },
  ]);
  expect(failureLines({ ...failure, fields: {} })).toEqual([{ message: failure.message, href: null }]);
  expect(failureLines(null)).toEqual([]);
});

test('what was done is told with its words', () => {
  expect(doneOf({ done: 'profile', words: 'Saved.' })).toEqual({ form: 'profile', words: 'Saved.' });
  expect(doneOf(failure)).toBeNull();
});
