import { readFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';

// Contrast as WCAG 2.2 defines it (success criteria 1.4.3 and 1.4.11; relative luminance in its glossary).

const css = readFileSync(new URL('../../app.css', import.meta.url), 'utf8');
const tokens = new Map(
  [...css.matchAll(/--color-([a-z-]+): light-dark\((#[0-9a-f]{6}), (#[0-9a-f]{6})\);/g)].map((found) => [
    found[1] ?? '',
    { light: found[2] ?? '', dark: found[3] ?? '' },
  ]),
);

function luminance(hex: string): number {
  const [r, g, b] = [1, 3, 5].map((at) => {
    const channel = Number.parseInt(hex.slice(at, at + 2), 16) / 255;
    return channel <= 0.04045 ? channel / 12.92 : ((channel + 0.055) / 1.055) ** 2.4;
  }) as [number, number, number];
  return 0.2126 * r + 0.7152 * g + 0.0722 * b;
}

function contrast(one: string, other: string): number {
  const [lighter, darker] = [luminance(one), luminance(other)].sort((a, b) => b - a) as [number, number];
  return (lighter + 0.05) / (darker + 0.05);
}

function value(token: string, theme: 'light' | 'dark'): string {
  const found = tokens.get(token);
  if (!found) throw new Error(`app.css has no colour "${token}" with a light and a dark value`);
  return found[theme];
}

const grounds = ['paper', 'sheet', 'well'];
const textPairs = [
  ...grounds.flatMap((ground) => ['graphite', 'graphite-soft'].map((ink) => [ink, ground])),
  ...grounds.flatMap((ground) => ['copper', 'verdigris', 'amber', 'oxide'].map((ink) => [ink, ground])),
  ...['verdigris', 'amber', 'oxide', 'copper'].flatMap((ink) => [
    [ink, `${ink}-wash`],
    ['graphite', `${ink}-wash`],
    ['graphite-soft', `${ink}-wash`],
  ]),
  ['copper-ink', 'copper'],
  ['copper-ink', 'copper-deep'],
  ['paper', 'graphite'],
] as [string, string][];
const graphicPairs = grounds.map((ground) => ['rule-strong', ground]) as [string, string][];

describe.each(['light', 'dark'] as const)('in the %s theme', (theme) => {
  test('the luminance formula gives 21:1 for black on white', () => {
    expect(contrast('#000000', '#ffffff')).toBeCloseTo(21, 10);
  });

  test.each(textPairs)('%s on %s can be read as text (4.5:1)', (ink, ground) => {
    expect(contrast(value(ink, theme), value(ground, theme))).toBeGreaterThanOrEqual(4.5);
  });

  test.each(graphicPairs)('%s on %s can be seen as the edge of a control (3:1)', (ink, ground) => {
    expect(contrast(value(ink, theme), value(ground, theme))).toBeGreaterThanOrEqual(3);
  });

  test('the grid stays fainter than a rule, so that drawings stand out from it', () => {
    const ground = value('sheet', theme);
    expect(contrast(value('grid', theme), ground)).toBeLessThan(contrast(value('rule', theme), ground));
  });
});
