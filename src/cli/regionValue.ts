/** The value of --region: a name and a box, `left=-3:0,-2:2`. */

import type { Region } from '../checks/Region.js';
import { UsageError } from '../errors.js';
import { numberValue } from './optionValues.js';

const MOST_AXES = 3;

/**
 * Reads NAME=LOW:HIGH,…: one pair per axis; an end left out is open.
 *
 * @throws UsageError
 */
export function regionValue(text: string, option: string): Region {
  const refuse = (what: string): never => {
    throw new UsageError(
      `${option} "${text}" ${what}; write a name and LOW:HIGH per axis, for example left=-3:0,-2:2 (an end left out is open)`,
      { option, value: text },
    );
  };
  const [, name = '', box = ''] = /^([^=]*)=(.*)$/.exec(text) ?? refuse('has no =');
  if (!/^[\p{L}\p{N}_.]+$/u.test(name)) refuse('needs a name of letters, digits, _ and .');
  const axes = box.split(',').map((part) => {
    const ends = part.split(':');
    if (ends.length !== 2) refuse(`has "${part}" where LOW:HIGH belongs`);
    const [low, high] = ends.map((end, side) => {
      if (end.trim() === '') return side === 0 ? -Infinity : Infinity;
      return numberValue({})(end, option);
    });
    if (!(low < high)) refuse(`has "${part}", whose low end is not below its high end`);
    return { low, high };
  });
  if (axes.length > MOST_AXES) refuse(`has ${axes.length} axes`);
  return { name, low: axes.map(({ low }) => low), high: axes.map(({ high }) => high) };
}
