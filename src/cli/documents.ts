/** Reading the documents that commands take as operands. */

import type { FitDocument } from '../documents/FitDocument.js';
import { parseFit } from '../documents/parseFit.js';
import { readDocument } from './files.js';
import { formatSuggestion } from './suggest.js';
import type { Terminal } from './Terminal.js';

/** @throws UsageError  where the file is missing or is not a fit file */
export async function readFit(path: string, terminal: Terminal): Promise<FitDocument> {
  const value = await readDocument(terminal.resolve(path), 'fit file', path);
  return parseFit(value, { source: path, suggest: formatSuggestion });
}
