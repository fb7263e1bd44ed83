/**
 * The plotting library on a document that needs no browser. A chart is a static picture of fixed drawing size which
 * the page scales, together with the places a reader can ask for values.
 */

import type * as PlotModule from '@observablehq/plot';

/** A place in the picture, in drawing units, and what the page says there. */
export type Probe = readonly [x: number, y: number, text: string];

export interface Chart {
  /** A complete `<svg>` element without scripts, style sheets or references outside the page. */
  readonly svg: string;
  readonly probes: readonly Probe[];
}

export interface Drawing {
  readonly Plot: typeof PlotModule;
  /** Draws the options; `decorate` may add elements in drawing units, over the picture. */
  draw(options: PlotModule.PlotOptions): Drawn;
}

export interface Drawn {
  readonly svg: string;
  readonly x: (value: number) => number;
  readonly y: (value: number) => number;
}

/** Font size of every chart, in drawing units (about one CSS pixel). */
export const FONT_SIZE = 12;

/** Loads the plotting library: slow, and so done only when a page is drawn. */
export async function openDrawing(): Promise<Drawing> {
  const [Plot, { parseHTML }] = await Promise.all([import('@observablehq/plot'), import('linkedom')]);
  const { document } = parseHTML('<!doctype html><html><body></body></html>');
  let clips = 0;
  return {
    Plot,
    draw(options) {
      const element = Plot.plot({ ...options, document });
      const svg = element as unknown as SvgElement;
      if (svg.tagName.toLowerCase() !== 'svg') throw new Error('the plotting library returned no picture');
      for (const child of [...svg.children]) if (child.tagName.toLowerCase() === 'style') child.remove();
      for (const name of ['class', 'width', 'height', 'font-family']) svg.removeAttribute(name);
      svg.setAttribute('font-size', String(FONT_SIZE));
      svg.setAttribute('aria-hidden', 'true');
      const ids = new Map<string, string>();
      const text = String(svg.outerHTML)
        // The library numbers its clipping regions across calls; renumbered, the same fit gives the same page.
        .replace(/plot-clip-\d+/g, (id) => {
          if (!ids.has(id)) ids.set(id, `clip-${++clips}`);
          return ids.get(id) ?? id;
        })
        .replace(/<[^>]*>/g, (tag) => tag.replace(/(\.\d\d)\d+/g, '$1').replace(/ aria-label="[^"]*"/g, ''));
      const scale = (name: 'x' | 'y') => {
        const found = element.scale(name);
        return (value: number) => Number(found?.apply(value) ?? 0);
      };
      return { svg: text, x: scale('x'), y: scale('y') };
    },
  };
}

interface SvgElement {
  readonly tagName: string;
  readonly children: ArrayLike<SvgElement> & Iterable<SvgElement>;
  readonly outerHTML: string;
  remove(): void;
  removeAttribute(name: string): void;
  setAttribute(name: string, value: string): void;
}

/** Adds elements, written in drawing units, on top of a finished picture. */
export function addToPicture(svg: string, elements: string): string {
  return svg.replace(/<\/svg>\s*$/, `${elements}</svg>`);
}

/** Width of a text in drawing units, rather too large than too small. */
export function guessTextWidth(text: string, fontSize: number): number {
  return [...text].length * fontSize * 0.62;
}
