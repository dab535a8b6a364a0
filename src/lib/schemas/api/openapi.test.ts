import { describe, expect, it } from 'vitest';
import { checkRequestSchema } from './check.ts';
import { heatingRequestSchema } from './heating.ts';
import { impedanceRequestSchema } from './impedance.ts';
import { openApiDocument } from './openapi.ts';

type Json = Record<string, unknown>;

function references(value: unknown, found: string[] = []): string[] {
  if (Array.isArray(value)) for (const item of value) references(item, found);
  else if (typeof value === 'object' && value !== null) {
    for (const [key, inner] of Object.entries(value)) {
      if (key === '$ref' && typeof inner === 'string') found.push(inner);
      else references(inner, found);
    }
  }
  return found;
}

function at(document: Json, reference: string): unknown {
  return reference
    .replace(/^#\//, '')
    .split('/')
    .reduce<unknown>((place, step) => (place as Json | undefined)?.[step], document);
}

describe('the OpenAPI document', () => {
  const document = openApiDocument('http://localhost:3000', 'v1');

  it('says it is OpenAPI 3.1 and names what needs no account', () => {
    expect(document['openapi']).toBe('3.1.0');
    expect(Object.keys(document['paths'] as Json)).toEqual([
      '/api/v1/checks',
      '/api/v1/impedance',
      '/api/v1/heatings',
      '/api/v1/heatings/{id}',
    ]);
  });

  it('has every schema that it refers to, inside itself', () => {
    const found = references(document);
    expect(found.length).toBeGreaterThan(10);
    for (const reference of found) {
      expect(reference).toMatch(/^#\/components\/schemas\//);
      expect(at(document, reference), reference).toBeDefined();
    }
  });

  it('tells units and ranges of the fields', () => {
    const tube = at(document, '#/components/schemas/Coil') as { properties: Json };
    expect(JSON.stringify(tube.properties['tube'])).toContain('[m]');
    expect(JSON.stringify(tube.properties['waterCircuits'])).toContain('"minimum":1');
  });

  it('gives examples that their own parsers take', () => {
    const operations = at(document, '#/paths') as Record<string, { post: Json }>;
    for (const [path, schema] of Object.entries({
      '/api/v1/checks': checkRequestSchema,
      '/api/v1/impedance': impedanceRequestSchema,
      '/api/v1/heatings': heatingRequestSchema,
    })) {
      const body = operations[path]?.post['requestBody'] as { content: Record<string, { example: unknown }> };
      const example = body.content['application/json']?.example;
      expect([path, schema.safeParse(example).success]).toEqual([path, true]);
    }
  });
});
