/** The half-sentence that offers the known word a misspelt one was probably meant to be. */

import { suggestName } from '../numerics/text/suggestName.js';

/** `; did you mean X?` where a known word is close, otherwise the empty string. */
export function formatSuggestion(word: string, known: readonly string[]): string {
  const suggestion = suggestName(word, known);
  return suggestion === null ? '' : `; did you mean ${suggestion}?`;
}
