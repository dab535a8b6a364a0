/** The few complex operations circuits need; plain objects, since circuits have a handful of elements. */
export interface Complex {
  re: number;
  im: number;
}

export const complex = (re: number, im = 0): Complex => ({ re, im });
export const add = (a: Complex, b: Complex): Complex => ({ re: a.re + b.re, im: a.im + b.im });
export const scale = (a: Complex, k: number): Complex => ({ re: a.re * k, im: a.im * k });
export const multiply = (a: Complex, b: Complex): Complex => ({
  re: a.re * b.re - a.im * b.im,
  im: a.re * b.im + a.im * b.re,
});
export function divide(a: Complex, b: Complex): Complex {
  const d = b.re * b.re + b.im * b.im;
  return { re: (a.re * b.re + a.im * b.im) / d, im: (a.im * b.re - a.re * b.im) / d };
}
export const magnitude = (a: Complex): number => Math.hypot(a.re, a.im);
/** Two impedances in parallel; `null` is an open branch. */
export function parallel(a: Complex, b: Complex | null): Complex {
  return b === null ? a : divide(multiply(a, b), add(a, b));
}
