import { z } from 'zod';
import { errorStatuses } from '@/lib/errors';
import { errorBodySchema } from '@/lib/schemas';
import packageFile from '@/package.json';
import { rowOf, routes, type Row, type RouteKey } from './routes';

type Json = Record<string, unknown>;

const schemaOf = (schema: z.ZodType, io: 'input' | 'output'): Json => {
  const described = z.toJSONSchema(schema, { io, unrepresentable: 'any' });
  return Object.fromEntries(Object.entries(described).filter(([name]) => name !== '$schema'));
};

const jsonContent = (schema: Json): Json => ({ 'application/json': { schema } });

function parametersOf(path: string, row: Row): Json[] {
  const inPath = [...path.matchAll(/:(\w+)/g)].map(([, name]) => ({
    name,
    in: 'path',
    required: true,
    schema: { type: 'string' },
  }));
  if (!row.query) return inPath;
  const query = schemaOf(row.query, 'input');
  const required = new Set((query.required as string[] | undefined) ?? []);
  const inQuery = Object.entries((query.properties as Json | undefined) ?? {}).map(([name, schema]) => ({
    name,
    in: 'query',
    required: required.has(name),
    schema,
  }));
  return [...inPath, ...inQuery];
}

function requestBodyOf(row: Row): Json | undefined {
  if (row.body) return { required: true, content: jsonContent(schemaOf(row.body, 'input')) };
  if (!row.parts) return undefined;
  const properties = Object.fromEntries(
    Object.entries(row.parts).map(([name, part]) => [
      name,
      { type: 'string', format: 'binary', description: `${part.summary} At most ${part.limit} bytes.` },
    ]),
  );
  const required = Object.keys(row.parts).filter((name) => row.parts?.[name].required);
  return {
    required: true,
    content: { 'multipart/form-data': { schema: { type: 'object', properties, required } } },
  };
}

function operationOf(path: string, row: Row): Json {
  const content = row.answer
    ? jsonContent(schemaOf(row.answer, 'output'))
    : Object.fromEntries(
        (row.produces ?? 'application/octet-stream')
          .split(', ')
          .map((type) => [type, { schema: { type: 'string' } }]),
      );
  const requestBody = requestBodyOf(row);
  return {
    summary: row.summary,
    ...(row.permission === 'anyone' ? { security: [] } : {}),
    ...(row.permission === 'anyone' || row.permission === 'user'
      ? {}
      : {
          description:
            row.permission === 'administrator'
              ? 'For site administrators; to anybody else it doesn’t exist.'
              : `Asks for the permission \`${row.permission}\` in the group.`,
        }),
    parameters: parametersOf(path, row),
    ...(requestBody ? { requestBody } : {}),
    responses: {
      [row.status ?? 200]: { description: 'Done.', content },
      default: { $ref: '#/components/responses/Error' },
    },
  };
}

/** The OpenAPI 3.1 description, made of the very schemas that requests and answers are parsed with. */
export function openApi(): Json {
  const paths: Record<string, Json> = {};
  for (const key of Object.keys(routes) as RouteKey[]) {
    const [method, path] = key.split(' ');
    const place = path.replace(/:(\w+)/g, '{$1}');
    paths[place] = { ...paths[place], [method.toLowerCase()]: operationOf(path, rowOf(key)) };
  }
  return {
    openapi: '3.1.0',
    info: { title: 'Beatnote', version: packageFile.version },
    servers: [{ url: '/api/v1' }],
    security: [{ token: [] }],
    paths,
    components: {
      securitySchemes: { token: { type: 'http', scheme: 'bearer' } },
      responses: {
        Error: {
          description: `An error, with one of ${errorStatuses.join(', ')}.`,
          content: jsonContent(schemaOf(errorBodySchema, 'output')),
        },
      },
    },
  };
}
