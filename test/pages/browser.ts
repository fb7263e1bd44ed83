/** A headless browser for the tests of pages, and what is asked of a page inside it. */

import { existsSync } from 'node:fs';
import { type Browser, chromium, type Page } from 'playwright-core';

const EXECUTABLE = '/usr/bin/chromium';

export const HAS_BROWSER = existsSync(EXECUTABLE);

/** Why the tests of pages are left out, for the title of the group. */
export const WHY_SKIPPED = HAS_BROWSER ? '' : ` (skipped: ${EXECUTABLE} is not installed)`;

export function openBrowser(): Promise<Browser> {
  return chromium.launch({
    executablePath: EXECUTABLE,
    // No name resolves: a page that asks for something outside fails, and is seen to ask.
    args: [
      '--no-sandbox',
      '--disable-gpu',
      '--disable-dev-shm-usage',
      '--host-resolver-rules=MAP * ~NOTFOUND',
    ],
  });
}

/** Text boxes as they are drawn, shrunk to the letters; the values at the pointer float on purpose and are left out. */
const GATHER_TEXTS = `
  const texts = [];
  const walker = document.createTreeWalker(document.body, NodeFilter.SHOW_TEXT);
  for (let node = walker.nextNode(); node; node = walker.nextNode()) {
    const element = node.parentElement;
    if (node.data.trim() === '' || element.closest('script, style, output')) continue;
    if (!element.checkVisibility({ visibilityProperty: true })) continue;
    const range = document.createRange();
    range.selectNodeContents(node);
    for (const box of element.ownerSVGElement ? [element.getBoundingClientRect()] : range.getClientRects()) {
      if (box.width < 0.5) continue;
      const trim = box.height * 0.18;
      texts.push({
        node, element, text: node.data.trim().slice(0, 60), scrolls: element.closest('.scroll') !== null,
        left: box.left, right: box.right, top: box.top + trim, bottom: box.bottom - trim,
      });
    }
  }
`;

/** Texts that lie on one another, stick out of the page or are cut off: empty where all is well. */
export async function findTextTrouble(page: Page): Promise<string[]> {
  return page.evaluate(`(() => {
    ${GATHER_TEXTS}
    const trouble = [];
    const width = document.documentElement.clientWidth;
    if (document.documentElement.scrollWidth > width) trouble.push('the page scrolls sideways');
    for (const a of texts)
      if (!a.scrolls && (a.right > width + 1 || a.left < -1)) trouble.push('sticks out: ' + a.text);
    texts.sort((a, b) => a.top - b.top);
    for (let i = 0; i < texts.length; i++) {
      for (let j = i + 1; j < texts.length && texts[j].top < texts[i].bottom; j++) {
        const [a, b] = [texts[i], texts[j]];
        if (a.node === b.node || a.scrolls || b.scrolls) continue;
        const across = Math.min(a.right, b.right) - Math.max(a.left, b.left);
        const down = Math.min(a.bottom, b.bottom) - Math.max(a.top, b.top);
        if (across > 1.5 && down > 1.5) trouble.push('overlap: ' + a.text + ' | ' + b.text);
      }
    }
    for (const element of document.querySelectorAll('body *')) {
      if (element.closest('svg') || !element.checkVisibility()) continue;
      const style = getComputedStyle(element);
      if (style.overflowX !== 'hidden' && style.overflowY !== 'hidden') continue;
      if (element.scrollWidth > element.clientWidth + 1 || element.scrollHeight > element.clientHeight + 1)
        trouble.push('cut off: ' + element.className + ' ' + element.textContent.slice(0, 60));
    }
    return trouble;
  })()`);
}

/** Texts whose contrast with the ground behind them is below WCAG AA: 4.5, or 3 for large letters. */
export async function findFaintTexts(page: Page): Promise<string[]> {
  return page.evaluate(`(() => {
    ${GATHER_TEXTS}
    const parse = (colour) => {
      const [red, green, blue, alpha = 1] = colour.match(/[\\d.]+/g).map(Number);
      return { rgb: [red, green, blue], alpha };
    };
    const mix = (over, under, alpha) => over.map((value, i) => alpha * value + (1 - alpha) * under[i]);
    // Relative luminance and contrast: WCAG 2.2, definitions.
    const luminance = (rgb) => {
      const [red, green, blue] = rgb
        .map((value) => value / 255)
        .map((value) => (value <= 0.04045 ? value / 12.92 : ((value + 0.055) / 1.055) ** 2.4));
      return 0.2126 * red + 0.7152 * green + 0.0722 * blue;
    };
    const faint = new Set();
    for (const { element, text } of texts) {
      const style = getComputedStyle(element);
      let ground = null;
      let opacity = 1;
      for (let at = element; at; at = at.parentElement) {
        opacity *= Number(getComputedStyle(at).opacity);
        const { rgb, alpha } = parse(getComputedStyle(at).backgroundColor);
        if (!ground && alpha === 1) ground = rgb;
      }
      const ink = parse(element.ownerSVGElement ? style.fill : style.color);
      const seen = mix(ink.rgb, ground, ink.alpha * opacity * Number(style.fillOpacity || 1));
      const [light, dark] = [luminance(seen), luminance(ground)].sort((a, b) => b - a);
      const ratio = (light + 0.05) / (dark + 0.05);
      const size = parseFloat(style.fontSize);
      const isLarge = size >= 24 || (size >= 18.66 && Number(style.fontWeight) >= 600);
      if (ratio < (isLarge ? 3 : 4.5)) faint.add(ratio.toFixed(2) + ': ' + text);
    }
    return [...faint];
  })()`);
}

/** How many texts a page shows now: a check on the checks. */
export async function countTexts(page: Page): Promise<number> {
  return page.evaluate(`(() => { ${GATHER_TEXTS} return texts.length; })()`);
}
