/** Plain text tables for studies, in a form that can be pasted into the docs. */

export function printTable(
  title: string,
  header: readonly string[],
  rows: readonly (readonly (string | number)[])[],
): void {
  console.log(`\n${title}\n`);
  console.log(`| ${header.join(' | ')} |`);
  console.log(`| ${header.map(() => '---').join(' | ')} |`);
  for (const row of rows) console.log(`| ${row.join(' | ')} |`);
}

export function percent(value: number, digits = 1): string {
  return `${(100 * value).toFixed(digits)} %`;
}

export function mean(values: readonly number[]): number {
  return values.reduce((sum, value) => sum + value, 0) / values.length;
}

export function deviation(values: readonly number[]): number {
  const centre = mean(values);
  return Math.sqrt(values.reduce((sum, value) => sum + (value - centre) ** 2, 0) / (values.length - 1));
}
