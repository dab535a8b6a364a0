import { expect, test } from 'vitest';
import { fieldId, firstMessage, pageTitle, summaryLines } from './form-errors.ts';

test('nested names make ids that can be linked to', () => {
  expect(fieldId('email')).toBe('field-email');
  expect(fieldId('lines[2].price')).toBe('field-lines-2-price');
});

test('the first message counts; nothing is no message', () => {
  expect(firstMessage(['Enter a price.', 'Too long.'])).toBe('Enter a price.');
  expect(firstMessage([])).toBeNull();
  expect(firstMessage('')).toBeNull();
  expect(firstMessage(undefined)).toBeNull();
});

test('the summary has one line per field, in order, linked to the field, nested ones too', () => {
  expect(
    summaryLines({
      _errors: ['Nothing was saved.'],
      email: ['Enter an e-mail.'],
      lines: { 0: { price: ['Enter a price.'] } },
    }),
  ).toEqual([
    { message: 'Nothing was saved.', href: null },
    { message: 'Enter an e-mail.', href: '#field-email' },
    { message: 'Enter a price.', href: '#field-lines-0-price' },
  ]);
});

test('the message of a whole list points at the list', () => {
  expect(summaryLines({ lines: { _errors: ['Add a line.'] } })).toEqual([
    { message: 'Add a line.', href: '#field-lines' },
  ]);
});

test('a title with errors says so first', () => {
  expect(pageTitle('Sign in', true)).toBe('Error: Sign in · Coilyard');
  expect(pageTitle('Sign in')).toBe('Sign in · Coilyard');
});
