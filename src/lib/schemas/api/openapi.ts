/** The OpenAPI 3.1 document of what needs no account, made from the schemas that parse the requests. */
import { z } from 'zod';
import {
  checkRequestSchema,
  checkResultSchema,
  figureSchema,
  findingSchema,
  ladderRowSchema,
} from './check.ts';
import { coilSchema } from './coil.ts';
import { exampleRequirement } from './examples.ts';
import { heatingAcceptedSchema, heatingRequestSchema, heatingStateSchema } from './heating.ts';
import { impedanceRequestSchema, impedanceResponseSchema } from './impedance.ts';
import { machineSchema } from './machine.ts';
import { processSchema, workpieceSchema } from './part.ts';
import { problemSchema } from './problem.ts';
import { acceptanceLineSchema, fixtureSchema, requirementSchema } from './requirement.ts';

type Json = Record<string, unknown>;

export interface ApiOperation {
  method: 'get' | 'post' | 'delete';
  path: string;
  id: string;
  summary: string;
  description: string;
  request?: string;
  example?: unknown;
  parameters?: Json[];
  responses: Record<string, { description: string; schema?: string }>;
}

const named: Record<string, z.ZodType> = {
  CheckRequest: checkRequestSchema,
  CheckResult: checkResultSchema,
  Requirement: requirementSchema,
  Machine: machineSchema,
  Workpiece: workpieceSchema,
  Process: processSchema,
  Coil: coilSchema,
  Fixture: fixtureSchema,
  AcceptanceLine: acceptanceLineSchema,
  Figure: figureSchema,
  Finding: findingSchema,
  LadderRow: ladderRowSchema,
  ImpedanceRequest: impedanceRequestSchema,
  ImpedanceResponse: impedanceResponseSchema,
  HeatingRequest: heatingRequestSchema,
  HeatingAccepted: heatingAcceptedSchema,
  HeatingState: heatingStateSchema,
  Problem: problemSchema,
};

const refusals = {
  '400': { description: 'The body cannot be read or computed; fields name what is wrong', schema: 'Problem' },
  '413': { description: 'The body is larger than 256 kB', schema: 'Problem' },
  '429': { description: 'Too often in a short time', schema: 'Problem' },
  '503': { description: 'All solver threads are busy', schema: 'Problem' },
};

const heatingId = {
  name: 'id',
  in: 'path',
  required: true,
  schema: { type: 'string', format: 'uuid' },
  description: 'The id that asking for the run answered',
};

const operations: ApiOperation[] = [
  {
    method: 'post',
    path: '/api/v1/checks',
    id: 'check',
    summary: 'Check a requirement',
    description:
      'Computes figures with bands, findings and the bank ladder of a requirement. SI base units, temperatures in °C, null means not known. Needs no account; the number of checks per minute is limited by address.',
    request: 'CheckRequest',
    example: { requirement: exampleRequirement(), setting: 'default' },
    responses: {
      '200': { description: 'The result of the check', schema: 'CheckResult' },
      ...refusals,
      '422': { description: 'The check is beyond what one run may take', schema: 'Problem' },
    },
  },
  {
    method: 'post',
    path: '/api/v1/impedance',
    id: 'impedance',
    summary: 'Impedance of a coil, alone and with a part',
    description:
      'Inductance, resistance and Q at up to 50 frequencies, as a meter at the contact faces would see them. Needs no account.',
    request: 'ImpedanceRequest',
    example: {
      coil: exampleRequirement().coil,
      part: null,
      includeLeads: true,
      frequencies: [10e3, 20e3],
    },
    responses: {
      '200': { description: 'Impedance at each frequency', schema: 'ImpedanceResponse' },
      ...refusals,
    },
  },
  {
    method: 'post',
    path: '/api/v1/heatings',
    id: 'heat',
    summary: 'Begin a heating run',
    description:
      'Temperatures of the part over time, with the field solved again as its properties change. Answers at once; the run is a job. Results are kept 24 h.',
    request: 'HeatingRequest',
    example: {
      requirement: exampleRequirement(),
      drive: null,
      frequency: null,
      duration: null,
      setting: 'preview',
    },
    responses: {
      '202': { description: 'The run was begun', schema: 'HeatingAccepted' },
      ...refusals,
    },
  },
  {
    method: 'get',
    path: '/api/v1/heatings/{id}',
    id: 'heatingState',
    summary: 'State, progress and result of a heating run',
    description: 'Poll once a second at most.',
    parameters: [heatingId],
    responses: {
      '200': { description: 'How far it is, with the result once it is done', schema: 'HeatingState' },
      '404': { description: 'There is no such run, or it is not yours', schema: 'Problem' },
    },
  },
  {
    method: 'delete',
    path: '/api/v1/heatings/{id}',
    id: 'cancelHeating',
    summary: 'Cancel a heating run',
    description: 'A finished run stays as it is.',
    parameters: [heatingId],
    responses: {
      '204': { description: 'Cancelled, or finished before' },
      '404': { description: 'There is no such run, or it is not yours', schema: 'Problem' },
    },
  },
];

function componentSchemas(): Json {
  const registry = z.registry<{ id: string }>();
  for (const [id, schema] of Object.entries(named)) registry.add(schema, { id });
  const { schemas } = z.toJSONSchema(registry, {
    target: 'draft-2020-12',
    io: 'input',
    uri: (id) => `#/components/schemas/${id}`,
  });
  return Object.fromEntries(
    Object.entries(schemas).map(([id, schema]) => {
      const { $schema: _dialect, $id: _id, id: _name, ...rest } = schema as Json;
      return [id, rest];
    }),
  );
}

const reference = (name: string) => ({ $ref: `#/components/schemas/${name}` });

function operationOf(operation: ApiOperation): Json {
  return {
    operationId: operation.id,
    summary: operation.summary,
    description: operation.description,
    ...(operation.parameters ? { parameters: operation.parameters } : {}),
    ...(operation.request
      ? {
          requestBody: {
            required: true,
            content: {
              'application/json': {
                schema: reference(operation.request),
                ...(operation.example === undefined ? {} : { example: operation.example }),
              },
            },
          },
        }
      : {}),
    responses: Object.fromEntries(
      Object.entries(operation.responses).map(([status, { description, schema }]) => [
        status,
        {
          description,
          ...(schema
            ? {
                content: {
                  [schema === 'Problem' ? 'application/problem+json' : 'application/json']: {
                    schema: reference(schema),
                  },
                },
              }
            : {}),
        },
      ]),
    ),
  };
}

/** The whole document. */
export function openApiDocument(origin: string, version: string): Json {
  const paths: Record<string, Json> = {};
  for (const operation of operations) {
    paths[operation.path] = { ...paths[operation.path], [operation.method]: operationOf(operation) };
  }
  return {
    openapi: '3.1.0',
    info: {
      title: 'Coilyard',
      version,
      description:
        'Figures are estimates for ordering, to be confirmed on the machine by qualified people. Local codes, the supply maker’s limits and licensed practice come first.',
    },
    servers: [{ url: origin }],
    paths,
    components: { schemas: componentSchemas() },
  };
}
