/** What README and DEVELOPERS tell people to type, read and open exists. */

import { existsSync, readdirSync, readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { describe, expect, test } from 'vitest';
import { DATA_SET_NAMES } from '../../datasets/truth.js';
import { COMMANDS } from '../../src/cli/commandTable.js';
import { OPTIONS, type OptionName } from '../../src/cli/options.js';
import { STANDING_CODE } from '../../src/simulation/standingConditions.js';

const ROOT = fileURLToPath(new URL('../..', import.meta.url));
const readme = readFileSync(`${ROOT}/README.md`, 'utf8');
const developers = readFileSync(`${ROOT}/DEVELOPERS.md`, 'utf8');

/** Long and short flags of an option, e.g. `--output`, `-o`. */
function listFlags(name: OptionName): string[] {
  return [...OPTIONS[name].flags.matchAll(/(?<![\w-])--?[a-z][a-z-]*/g)].map(([flag]) => flag);
}

/** Lines that begin with `wanderlaw` in blocks of shell, without their comments. */
const commandLines = [...readme.matchAll(/^```sh\n([\s\S]*?)^```/gm)]
  .flatMap(([, block]) => block.split('\n'))
  .map((line) => line.replace(/\s+#.*$/, ''))
  .filter((line) => line.startsWith('wanderlaw '));

describe('README', () => {
  test.each(commandLines)('knows %s', (line) => {
    const [, name, ...words] = line.split(/\s+/);
    const command = COMMANDS.find((each) => each.name === name);
    expect(command, name).toBeDefined();
    const flags = (command?.options ?? []).flatMap(listFlags);
    for (const word of words.filter((each) => each.startsWith('-'))) expect(flags).toContain(word);
    if (name === 'demo') expect(DATA_SET_NAMES).toContain(words[0]);
  });

  test('every option it names is one of the program', () => {
    const known = new Set(['--help', ...(Object.keys(OPTIONS) as OptionName[]).flatMap(listFlags)]);
    const named = [...readme.matchAll(/`(--[a-z][a-z-]*)/g)].map(([, flag]) => flag);
    expect(named.filter((flag) => !known.has(flag))).toEqual([]);
  });

  test('its table of commands is the list of commands', () => {
    const section = readme.slice(readme.indexOf('## Commands'), readme.indexOf('## As a library'));
    const rows = [...section.matchAll(/^\| `([a-z]+) /gm)].map(([, name]) => name);
    expect(rows.sort()).toEqual(COMMANDS.map(({ name }) => name).sort());
  });
});

/** Codes of warnings in the sources; where a part of one is put in, `…` stands for it. */
function listWarningCodes(): Set<string> {
  const sources = readdirSync(`${ROOT}/src`, { recursive: true, encoding: 'utf8' }).filter((path) =>
    path.endsWith('.ts'),
  );
  const codes = new Set<string>();
  for (const path of sources) {
    const text = readFileSync(`${ROOT}/src/${path}`, 'utf8');
    for (const [, code] of text.matchAll(/\bcode: '([a-z-]+)'/g)) codes.add(code);
    for (const [, code] of text.matchAll(/\bwarn\(\s*'([a-z-]+)'/g)) codes.add(code);
    for (const [, head] of text.matchAll(/\bcode: `([^`$]*)\$\{/g)) codes.add(`${head}…`);
  }
  return codes;
}

test('README explains every warning there is, and no other', () => {
  const section = readme.slice(
    readme.indexOf('## What the warnings mean'),
    readme.indexOf('## As a library'),
  );
  const explained = [...section.matchAll(/^\| (`.*?`) \|/gm)].flatMap(([, cell]) =>
    [...cell.matchAll(/`([^`]+)`/g)].map(([, code]) => code),
  );
  const inSources = [...listWarningCodes()].flatMap((code) => {
    if (code === 'negative-…') return ['friction', 'noise', 'diffusion'].map((name) => `negative-${name}`);
    return code === '…' ? [`${STANDING_CODE}…`] : [code]; // the one code that begins with a name
  });
  expect(explained.sort()).toEqual([...new Set(inSources)].sort());
});

test('npm scripts named in README and DEVELOPERS exist', () => {
  const { scripts } = JSON.parse(readFileSync(`${ROOT}/package.json`, 'utf8')) as {
    scripts: Record<string, string>;
  };
  const named = [...`${readme}\n${developers}`.matchAll(/npm run ([a-z:]+)/g)].map(([, name]) => name);
  expect(named.filter((name) => !(name in scripts))).toEqual([]);
});

test('files and folders named in DEVELOPERS exist', () => {
  const named = [...developers.matchAll(/`((?:src|test|datasets|notebooks)\/[\w/.-]+)`/g)].map(
    ([, path]) => path,
  );
  expect(named.length).toBeGreaterThan(5);
  expect(named.filter((path) => !existsSync(`${ROOT}/${path}`))).toEqual([]);
});

test('links in README and DEVELOPERS lead somewhere', () => {
  const targets = [...`${readme}\n${developers}`.matchAll(/\]\(([^)#\s]+)[^)]*\)/g)].map(
    ([, target]) => target,
  );
  const local = targets.filter((target) => !/^https?:/.test(target));
  expect(local.filter((target) => !existsSync(`${ROOT}/${target}`))).toEqual([]);
});

test('links within README lead to its headings', () => {
  const anchors = [...readme.matchAll(/^#+ (.+)$/gm)].map(([, heading]) =>
    heading
      .toLowerCase()
      .replace(/[^\p{L}\p{N} -]/gu, '')
      .replaceAll(' ', '-'),
  );
  const targets = [...readme.matchAll(/\]\(#([^)]+)\)/g)].map(([, target]) => target);
  expect(targets.length).toBeGreaterThan(2);
  expect(targets.filter((target) => !anchors.includes(target))).toEqual([]);
});
