import { describe, expect, test } from 'vitest';
import { dropNote, noteKey, readNote, writeNote } from './resume-notes.ts';
import { sizeText } from './size-text.ts';

function storage(): Storage {
  const kept = new Map<string, string>();
  return {
    get length() {
      return kept.size;
    },
    clear: () => kept.clear(),
    key: (index) => [...kept.keys()][index] ?? null,
    getItem: (key) => kept.get(key) ?? null,
    setItem: (key, value) => void kept.set(key, value),
    removeItem: (key) => void kept.delete(key),
  };
}

const hour = 3_600_000;
const print = { companyId: 'c', purpose: 'coil-drawing', name: 'a.pdf', size: 20_000_000, lastModified: 5 };
const note = { fileId: 'f', parts: [{ number: 1, etag: '"e"' }], at: 0 };

describe('notes of large uploads', () => {
  test('come back for exactly the same file', () => {
    const store = storage();
    writeNote(store, noteKey(print), note);
    expect(readNote(store, noteKey(print), hour)).toEqual(note);
    expect(readNote(store, noteKey({ ...print, lastModified: 6 }), hour)).toBeUndefined();
    expect(readNote(store, noteKey({ ...print, size: 1 }), hour)).toBeUndefined();
  });

  test('are forgotten after a day, when dropped, and when they are not notes', () => {
    const store = storage();
    writeNote(store, 'k', note);
    expect(readNote(store, 'k', 24 * hour)).toBeUndefined();
    expect(store.getItem('k')).toBeNull();
    writeNote(store, 'k', note);
    dropNote(store, 'k');
    expect(readNote(store, 'k', hour)).toBeUndefined();
    for (const text of ['{', '5', '{"fileId":"f","parts":[{"number":"1"}],"at":0}']) {
      store.setItem('k', text);
      expect(readNote(store, 'k', hour)).toBeUndefined();
    }
  });

  test('a browser without storage uploads all the same', () => {
    const broken = {
      ...storage(),
      getItem: () => {
        throw new Error('denied');
      },
      setItem: () => {
        throw new Error('full');
      },
    };
    expect(() => writeNote(broken, 'k', note)).not.toThrow();
    expect(readNote(broken, 'k', hour)).toBeUndefined();
  });
});

test('sizes are said in one unit', () => {
  expect([999, 1000, 999_499, 999_500, 12_345_678].map(sizeText)).toEqual([
    '999 B',
    '1 kB',
    '999 kB',
    '1.0 MB',
    '12.3 MB',
  ]);
});
