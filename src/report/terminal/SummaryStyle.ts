/** How summaries for people at a terminal are laid out: the width, and colours as handed in. */

export type Paint = (text: string) => string;

export interface SummaryStyle {
  /** Columns of the terminal, at least 40. */
  readonly width: number;
  readonly colors: { readonly bold: Paint; readonly dim: Paint; readonly red: Paint; readonly green: Paint };
}

const plain: Paint = (text) => text;

/** 100 columns without any colour. */
export const PLAIN_STYLE: SummaryStyle = {
  width: 100,
  colors: { bold: plain, dim: plain, red: plain, green: plain },
};
