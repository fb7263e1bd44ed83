/** How a formula is refused: in one sentence, with the text, what is wrong with it, and what would mend it. */

import { UsageError } from '../errors.js';

/**
 * @param what  continues "the formula … "
 * @param character  where in the text, counted from 1; 0 where unknown
 * @param name  the name that is wrong, where it is one
 * @throws UsageError  always
 */
export function refuse(text: string, what: string, advice: string, character: number, name = ''): never {
  const shown = text.length > 80 ? `${text.slice(0, 77)}...` : text;
  throw new UsageError(`the formula "${shown}" ${what}; ${advice}`, { formula: text, character, name });
}
