/** Text from the user's files reaches a page as text alone. */

import fc from 'fast-check';
import { parseHTML } from 'linkedom';
import { describe, expect, test } from 'vitest';
import { escapeHtml, Html, html, tameText, userText } from '../../src/report/html.js';

const HOSTILE = [
  '<script>alert(1)</script>',
  `"><img src=x onerror='alert(1)'>`,
  `' onmouseover='alert(1)`,
  '</style></script><b>',
  '&lt;&amp;&#39;',
  '\u202egnp.exe',
  'a\u0000b\u0007c\r\nd',
  'مسار ١',
  '🐌👩‍🔬',
  '',
];

describe('escaping', () => {
  test('as content and as attribute, a parser gets back exactly what was put in', () => {
    const check = (text: string) => {
      const page = html`<!doctype html><body><p title="${text}" lang='${text}'>${text}</p></body>`.text;
      const paragraph = parseHTML(page).document.querySelector('p');
      // Line ends and null characters are the parser's own affair; neither is markup.
      const plain = (value: string | null | undefined) => (value ?? '').replace(/[\r\n\0]/g, ' ');
      expect(plain(paragraph?.textContent)).toBe(plain(text));
      expect(plain(paragraph?.getAttribute('title'))).toBe(plain(text));
      expect(plain(paragraph?.getAttribute('lang'))).toBe(plain(text));
      expect(paragraph?.children).toHaveLength(0);
    };
    HOSTILE.forEach(check);
    fc.assert(
      fc.property(fc.string({ unit: 'binary' }), (text) => {
        check(text.replace(/[\ud800-\udfff]/g, ''));
      }),
      { seed: 1, numRuns: 200 },
    );
  });

  test('leaves no character that could open markup', () => {
    fc.assert(
      fc.property(fc.string({ unit: 'binary' }), (text) => !/[<>"']/.test(escapeHtml(text))),
      { seed: 2 },
    );
  });

  test('literal parts and marked text stand as they are, lists are joined, nothing vanishes but null and false', () => {
    const inner = html`<b>${'<'}</b>`;
    expect(html`${inner}${[inner, 'x']}${0}${null}${undefined}${false}${new Html('<hr>')}`.text).toBe(
      '<b>&lt;</b><b>&lt;</b>x0<hr>',
    );
  });
});

describe('taming', () => {
  test('takes out control characters and marks that turn the direction of writing', () => {
    expect(tameText('a\u0000b\u202ec\u2066d\r\n\te\ufeff')).toBe('a b c d e');
  });

  test('keeps letters of every script, emoji and their joiners', () => {
    for (const text of ['مسار ١', '細胞の軌跡', '👩‍🔬', 'µm²']) expect(tameText(text)).toBe(text);
  });

  test('shortens in the middle, to the length in characters, not in code units', () => {
    expect(tameText('abcdefghijklmnop', 10)).toBe('abcdef…nop');
    fc.assert(
      fc.property(
        fc.string({ unit: 'grapheme' }),
        fc.integer({ min: 4, max: 30 }),
        (text, length) => [...tameText(text, length)].length <= length,
      ),
      { seed: 3 },
    );
    expect(tameText('🐌'.repeat(20), 10)).not.toMatch(/[\ud800-\udbff](?![\udc00-\udfff])/);
  });

  test('isolates names from the direction of the sentence around them', () => {
    expect(userText('<مسار>').text).toBe('<bdi>&lt;مسار&gt;</bdi>');
  });
});
