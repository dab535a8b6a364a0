import { expect, test } from 'vitest';
import { acceptOf, cleanFileName, filePurposes, kindOfName, kindsText } from './files.ts';

test('the kind follows from the last extension, in any case', () => {
  expect(kindOfName('Nest.STP')).toBe('step');
  expect(kindOfName('photo.JPG')).toBe('jpeg');
  expect(kindOfName('drawing.pdf.html')).toBeUndefined();
  expect(kindOfName('pdf')).toBeUndefined();
  expect(kindOfName('.')).toBeUndefined();
});

test('a name is data: no folders, no control characters, no marks that turn the reading direction', () => {
  expect(cleanFileName('C:\\temp\\coil.pdf')).toBe('coil.pdf');
  expect(cleanFileName('../../etc/coil.pdf')).toBe('coil.pdf');
  expect(cleanFileName('coil\r\nX: 1.pdf')).toBe('coilX: 1.pdf');
  expect(cleanFileName('coil\u202Efdp.png')).toBe('coilfdp.png');
  expect(cleanFileName('  Induktor  Ø 40.pdf ')).toBe('Induktor Ø 40.pdf');
});

test('every purpose takes files, says which, and never SVG or HTML', () => {
  for (const purpose of filePurposes) {
    expect(acceptOf(purpose)).toMatch(/^\.pdf,/);
    expect(acceptOf(purpose)).not.toMatch(/svg|htm|xml/);
    expect(kindsText(purpose)).toMatch(/^PDF, .* or /);
  }
});
