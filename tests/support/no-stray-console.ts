import { afterEach, beforeEach, expect, vi } from 'vitest';

// A test that prints is a test nobody reads: unexpected console output fails it.
const methods = ['log', 'info', 'warn', 'error', 'debug'] as const;
let said: string[] = [];

beforeEach(() => {
  said = [];
  for (const method of methods) {
    vi.spyOn(console, method).mockImplementation((...args: unknown[]) => {
      said.push(`${method}: ${args.map(String).join(' ')}`);
    });
  }
});

afterEach(() => {
  const output = said;
  vi.restoreAllMocks();
  if (output.length > 0) expect.fail(`unexpected console output:\n${output.join('\n')}`);
});
