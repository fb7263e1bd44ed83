import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { describe, expect, it } from 'vitest';
import { describeDocuments } from '../../src/documents/jsonSchemas.js';

const root = fileURLToPath(new URL('../../', import.meta.url));
const manifest = JSON.parse(readFileSync(`${root}package.json`, 'utf8')) as {
  bin: Record<string, string>;
  exports: Record<string, string | { types: string; default: string }>;
  dependencies: Record<string, string>;
  devDependencies: Record<string, string>;
};

describe('the package', () => {
  it('pins every dependency to one version', () => {
    for (const versions of [manifest.dependencies, manifest.devDependencies]) {
      for (const version of Object.values(versions)) expect(version).toMatch(/^\d+\.\d+\.\d+$/);
    }
  });

  it('offers the program and the library at places that the build writes', () => {
    expect(manifest.bin).toEqual({ wanderlaw: 'dist/bin/wanderlaw.js' });
    expect(readFileSync(`${root}bin/wanderlaw.ts`, 'utf8')).toMatch(/^#!\/usr\/bin\/env node\n/);
    expect(manifest.exports['.']).toEqual({
      types: './dist/src/index.d.ts',
      default: './dist/src/index.js',
    });
    expect(manifest.exports['./schemas/*']).toBe('./dist/schemas/*');
  });
});

describe('the published schemas', () => {
  const schemas = describeDocuments();

  it('describe every key of a study in words or by its choices', () => {
    const { properties } = schemas.study as { properties: Record<string, Record<string, unknown>> };
    for (const [key, property] of Object.entries(properties)) {
      if (key === '$schema') continue;
      expect(property.description ?? property.enum, key).toBeDefined();
    }
  });

  it('let a study leave everything out, and refuse unknown keys', () => {
    expect(schemas.study.required ?? []).toEqual([]);
    expect(schemas.study.additionalProperties).toBe(false);
    expect(schemas.fit.additionalProperties).toBe(false);
    expect(schemas.scenario.additionalProperties).toBe(false);
  });

  it('name the format of their documents', () => {
    for (const name of ['fit', 'scenario'] as const) {
      const { properties } = schemas[name] as { properties: Record<string, Record<string, unknown>> };
      expect(properties.format.const).toBe(`wanderlaw-${name}`);
    }
  });
});
