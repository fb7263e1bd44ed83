/** Colours that read in greyscale: every scale runs one way in lightness, and lines that share a picture differ. */

import { describe, expect, test } from 'vitest';
import { DARK, LIGHT, type Palette, resolveColours, writeVariables } from '../../src/report/palette.js';

/** Relative luminance of an sRGB colour. Source: WCAG 2.2, definitions. */
function luminance(colour: string): number {
  const [red, green, blue] = [1, 3, 5]
    .map((at) => Number.parseInt(colour.slice(at, at + 2), 16) / 255)
    .map((value) => (value <= 0.04045 ? value / 12.92 : ((value + 0.055) / 1.055) ** 2.4));
  return 0.2126 * red + 0.7152 * green + 0.0722 * blue;
}

const contrast = (a: string, b: string) => {
  const [dark, light] = [luminance(a), luminance(b)].sort((x, y) => x - y);
  return (light + 0.05) / (dark + 0.05);
};

describe.each<[string, Palette, number]>([
  ['light', LIGHT, -1],
  ['dark', DARK, 1],
])('the %s palette', (_, palette, direction) => {
  test.each(['value', 'doubt'])('has a scale of %s whose classes are told apart without hue', (name) => {
    const colours = Object.keys(palette).filter((key) => key.startsWith(`${name}-`));
    const steps = colours.slice(1).map((key, i) => {
      expect(Math.sign(luminance(palette[key]) - luminance(palette[colours[i]]))).toBe(direction);
      return contrast(palette[key], palette[colours[i]]);
    });
    // a fifth more or less light is seen side by side
    expect(Math.min(...steps)).toBeGreaterThan(1.2);
  });

  test('has lines and bands that stand out from the ground and from one another', () => {
    for (const name of ['line', 'simulated', 'ink', 'soft', 'muted', 'good', 'bad'])
      expect(contrast(palette[name], palette.paper), name).toBeGreaterThan(4.5);
    for (const name of ['bar', 'track-a', 'track-b', 'track-c', 'track-d'])
      expect(contrast(palette[name], palette.paper), name).toBeGreaterThan(3);
    expect(contrast(palette.line, palette.band)).toBeGreaterThan(2.5);
    expect(contrast(palette.line, palette['simulated-band'])).toBeGreaterThan(3);
    expect(contrast(palette.band, palette['band-wide'])).toBeGreaterThan(1.4);
  });

  test('is whole: both have the same names, all of them colours', () => {
    expect(Object.keys(palette)).toEqual(Object.keys(LIGHT));
    for (const colour of Object.values(palette)) expect(colour).toMatch(/^#[0-9a-f]{6}$/);
    expect(writeVariables(palette)).toContain(`--ink: ${palette.ink};`);
    expect(resolveColours('fill="var(--ink)" stroke="var(--unknown)"', palette)).toBe(
      `fill="${palette.ink}" stroke="var(--unknown)"`,
    );
  });
});
