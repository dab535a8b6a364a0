import { ZxcvbnFactory } from '@zxcvbn-ts/core';
import { adjacencyGraphs, dictionary } from '@zxcvbn-ts/language-common';

export const passwordLength = { min: 12, max: 128 } as const;

/**
 * Fewer guesses than this and a password is as good as on the list: covers the words of the shipped list
 * of common passwords (@zxcvbn-ts/language-common, some 49,000 entries), and those with a number, a
 * capital or a repetition put to them. Our tries are limited per account, so ten million is far beyond
 * what can be tried (zxcvbn's documentation calls 10^6 to 10^8 safe from unlimited online guessing).
 */
const fewestGuesses = 1e7;

/** Estimation grows with length; what is longer than this is judged by its beginning. */
const judgedLength = 64;

let estimator: ZxcvbnFactory | undefined;

/**
 * What is wrong with a new password, in words for its field; undefined when it may be used. Length is
 * counted in characters (code points); any character may be used and nothing about its make-up is asked.
 */
export function passwordProblem(password: string, about: readonly string[] = []): string | undefined {
  const length = [...password].length;
  if (length < passwordLength.min) {
    return `A password has ${passwordLength.min} characters or more; this one has ${length}.`;
  }
  if (length > passwordLength.max) return `A password has ${passwordLength.max} characters at most.`;
  estimator ??= new ZxcvbnFactory({ dictionary, graphs: adjacencyGraphs });
  const words = about
    .flatMap((text) => [text, ...text.split('@'), ...text.split(/[@.\s]+/)])
    .filter((word) => word.length > 2);
  const { guesses } = estimator.check(password.slice(0, judgedLength), ['coilyard', ...words]);
  if (guesses < fewestGuesses) {
    return 'This password is among those that are tried first. Please choose another, for example four words that do not belong together.';
  }
  return undefined;
}
