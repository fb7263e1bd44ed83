/**
 * The colours of pages and figures. Every scale runs steadily from light to dark, so that it reads in greyscale and to
 * colour-blind eyes; lines that share a picture differ in lightness and in how they are drawn.
 */

export type Palette = Readonly<Record<string, string>>;

export const LIGHT: Palette = {
  paper: '#fcfbf8',
  card: '#ffffff',
  ink: '#1c2126',
  soft: '#454e56',
  muted: '#5f6870',
  rule: '#dcd8cf',
  line: '#10507f',
  band: '#8db4d3',
  'band-wide': '#d3e2ee',
  bar: '#5c91bb',
  rare: '#cfcabf',
  simulated: '#a8480a',
  'simulated-band': '#f3d2b5',
  good: '#1d6b45',
  bad: '#a03114',
  'track-a': '#10507f',
  'track-b': '#c07a3c',
  'track-c': '#3f8f7c',
  'track-d': '#4c3a66',
  hatch: '#cdc7ba',
  veil: '#ffffff',
  stripe: '#8d8878',
  'value-0': '#f4eed6',
  'value-1': '#cedcae',
  'value-2': '#9fc8a0',
  'value-3': '#6cb09f',
  'value-4': '#3b8c99',
  'value-5': '#28648a',
  'value-6': '#253a6b',
  'doubt-0': '#f7f0e6',
  'doubt-1': '#efd3af',
  'doubt-2': '#dca676',
  'doubt-3': '#b96c4a',
  'doubt-4': '#763531',
};

export const DARK: Palette = {
  paper: '#14181c',
  card: '#1c2227',
  ink: '#e9e6df',
  soft: '#c3c6c6',
  muted: '#a0a7ab',
  rule: '#394148',
  line: '#7fc0ee',
  band: '#2f6289',
  'band-wide': '#22394b',
  bar: '#4c8dbb',
  rare: '#4a5158',
  simulated: '#f0a35e',
  'simulated-band': '#5d4027',
  good: '#6cc79a',
  bad: '#f49a7d',
  'track-a': '#7fc0ee',
  'track-b': '#d9975a',
  'track-c': '#6fb5a2',
  'track-d': '#c5b2e6',
  hatch: '#48525b',
  veil: '#14181c',
  stripe: '#7d8890',
  'value-0': '#26366a',
  'value-1': '#26507a',
  'value-2': '#31748f',
  'value-3': '#4f998f',
  'value-4': '#86bb91',
  'value-5': '#c1d8a4',
  'value-6': '#f4eccb',
  'doubt-0': '#3d2a23',
  'doubt-1': '#62382d',
  'doubt-2': '#96573c',
  'doubt-3': '#cf915f',
  'doubt-4': '#f6d9ae',
};

/** The palette as CSS variables: `--ink: #1c2126; …`. */
export function writeVariables(palette: Palette): string {
  return Object.entries(palette)
    .map(([name, colour]) => `--${name}: ${colour};`)
    .join(' ');
}

/** The colours themselves in the place of `var(--name)`, for pictures that stand outside a page. */
export function resolveColours(text: string, palette: Palette): string {
  return text.replace(/var\(--([\w-]+)\)/g, (whole, name: string) => palette[name] ?? whole);
}
