import { describe, expect, it } from 'vitest';
import { describeDocuments } from '../../src/documents/jsonSchemas.js';

interface Node {
  readonly description?: string;
  readonly properties?: Readonly<Record<string, Node>>;
  readonly anyOf?: readonly Node[];
  readonly oneOf?: readonly Node[];
  readonly items?: Node;
  readonly additionalProperties?: Node | boolean;
  readonly $ref?: string;
}

const schema = describeDocuments().scenario as Node & { $defs?: Readonly<Record<string, Node>> };

/** Paths of all properties, with their descriptions. */
function listFields(node: Node, path: string, found: Map<string, string | undefined>): void {
  for (const [key, child] of Object.entries(node.properties ?? {})) {
    if (key === '$schema') continue;
    found.set(`${path}.${key}`, child.description ?? found.get(`${path}.${key}`));
    listFields(child, `${path}.${key}`, found);
  }
  for (const child of [...(node.anyOf ?? []), ...(node.oneOf ?? [])]) listFields(child, path, found);
  if (node.items) listFields(node.items, `${path}[]`, found);
  if (typeof node.additionalProperties === 'object')
    listFields(node.additionalProperties, `${path}{}`, found);
}

describe('the published schema of scenarios', () => {
  const fields = new Map<string, string | undefined>();
  listFields(schema, '', fields);
  for (const definition of Object.values(schema.$defs ?? {})) listFields(definition, '', fields);

  it('explains every field', () => {
    expect(fields.size).toBeGreaterThan(60);
    expect([...fields].filter(([, text]) => text === undefined).map(([path]) => path)).toEqual([]);
  });

  it('knows what a scenario is made of', () => {
    for (const path of [
      '.dimensions',
      '.units.length',
      '.mass',
      '.reading',
      '.axes[].kind',
      '.parameters',
      '.coefficients.force',
      '.continuation.towards.friction',
      '.start.warmUp',
      '.observation.exposure',
      '.integration.integrator',
      '.ensemble.draws',
      '.standing.conditions[].verdict',
      '.standing.relaxation.samples.value',
      '.provenance',
    ]) {
      expect(fields.get(path), path).toBeTypeOf('string');
    }
  });
});
