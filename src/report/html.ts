/**
 * Text that may be put into a page as it stands. The template `html` escapes every plain string put into it, so
 * text from the user's files can reach the page as text alone.
 */
export class Html {
  readonly text: string;
  constructor(text: string) {
    this.text = text;
  }
}

export type HtmlPart = Html | string | number | null | undefined | false | readonly HtmlPart[];

const ESCAPES: Readonly<Record<string, string>> = {
  '&': '&amp;',
  '<': '&lt;',
  '>': '&gt;',
  '"': '&quot;',
  "'": '&#39;',
};

/** Escapes text for element content and quoted attributes. */
export function escapeHtml(text: string): string {
  return text.replace(/[&<>"']/g, (character) => ESCAPES[character] ?? character);
}

function render(part: HtmlPart): string {
  if (part instanceof Html) return part.text;
  if (part === null || part === undefined || part === false) return '';
  if (typeof part === 'object') return part.map(render).join('');
  return escapeHtml(String(part));
}

/** Template tag: literal parts stand as they are, inserted strings are escaped, arrays are joined, null vanishes. */
export function html(strings: TemplateStringsArray, ...parts: readonly HtmlPart[]): Html {
  let text = strings[0] ?? '';
  parts.forEach((part, index) => {
    text += render(part) + (strings[index + 1] ?? '');
  });
  return new Html(text);
}

// Control characters (they end tags in no browser, but show as boxes), and the marks that turn the direction of
// the text after them, which could make a page read differently from what it says.
const UNWANTED = /[\u0000-\u001f\u007f-\u009f\u200e\u200f\u202a-\u202e\u2066-\u2069\ufeff]/g;

/** Text from the user's files made fit for one line: no control or direction marks, at most `length` characters. */
export function tameText(text: string, length = 80): string {
  const characters = [...text.replace(UNWANTED, ' ').replace(/\s+/g, ' ').trim()];
  if (characters.length <= length) return characters.join('');
  const tail = Math.floor(length / 3);
  return `${characters.slice(0, length - tail - 1).join('')}…${characters.slice(-tail).join('')}`;
}

/** A name from the user's files, isolated so that right-to-left letters leave the sentence around it alone. */
export function userText(text: string, length = 80): Html {
  return html`<bdi>${tameText(text, length)}</bdi>`;
}
