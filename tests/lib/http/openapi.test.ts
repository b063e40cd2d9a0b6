import { describe, expect, it } from 'vitest';
import { openApi } from '@/lib/http/openapi';
import { routes } from '@/lib/http/routes';

interface Operation {
  parameters: { name: string; in: string }[];
  requestBody?: { content: Record<string, { schema: { required?: string[]; properties?: object } }> };
  responses: Record<string, unknown>;
  security?: unknown[];
}
const document = openApi() as { openapi: string; paths: Record<string, Record<string, Operation>> };

describe('the OpenAPI description', () => {
  it('is version 3.1 and has every route of the table once', () => {
    expect(document.openapi).toBe('3.1.0');
    const described = Object.entries(document.paths).flatMap(([path, operations]) =>
      Object.keys(operations).map((method) => `${method.toUpperCase()} ${path.replace(/\{(\w+)\}/g, ':$1')}`),
    );
    expect(described.sort()).toEqual(Object.keys(routes).sort());
  });

  it('declares every parameter of a path', () => {
    for (const [path, operations] of Object.entries(document.paths)) {
      const names = [...path.matchAll(/\{(\w+)\}/g)].map(([, name]) => name);
      for (const operation of Object.values(operations)) {
        const declared = operation.parameters.filter((one) => one.in === 'path').map((one) => one.name);
        expect(declared).toEqual(names);
      }
    }
  });

  it('describes an upload part by part, and a body by the schema that parses it', () => {
    const upload = document.paths['/groups/{id}/measurements'].post.requestBody;
    expect(upload?.content['multipart/form-data'].schema.required).toEqual(['file']);
    const group = document.paths['/groups'].post.requestBody;
    expect(Object.keys(group?.content['application/json'].schema.properties ?? {})).toEqual(['name']);
  });

  it('asks for a token everywhere but where anyone may come', () => {
    const open = Object.entries(document.paths)
      .filter(([, operations]) => Object.values(operations).some((one) => one.security?.length === 0))
      .map(([path]) => path);
    expect(open.sort()).toEqual(['/health', '/openapi.json']);
  });
});
