// Writes the published JSON Schemas into dist/schemas; the last step of the build.
import { mkdirSync, writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { describeDocuments } from '../src/documents/jsonSchemas.js';

const directory = fileURLToPath(new URL('../schemas/', import.meta.url)); // seen from dist/bin
mkdirSync(directory, { recursive: true });
for (const [name, schema] of Object.entries(describeDocuments())) {
  writeFileSync(`${directory}${name}.schema.json`, `${JSON.stringify(schema, null, 2)}\n`);
}
