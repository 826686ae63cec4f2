/** Plain text on paper of a fixed width: rules, wrapped sentences, tables whose figures line up. */
export const PAPER_WIDTH = 80;

/** Words broken into lines of at most `width`; a word longer than the line stands alone and is cut. */
export function wrapped(text: string, width: number = PAPER_WIDTH): string[] {
  const lines: string[] = [];
  let line = '';
  for (const word of text.split(/\s+/).filter(Boolean)) {
    if (line === '') line = word;
    else if (lengthOf(line) + 1 + lengthOf(word) <= width) line += ` ${word}`;
    else {
      lines.push(line);
      line = word;
    }
    while (lengthOf(line) > width) {
      lines.push(Array.from(line).slice(0, width).join(''));
      line = Array.from(line).slice(width).join('');
    }
  }
  if (line !== '') lines.push(line);
  return lines;
}

/** Wrapped with a label in a margin column. */
export function noted(label: string, text: string, margin: number): string[] {
  return wrapped(text, PAPER_WIDTH - margin).map(
    (line, index) => `${padEnd(index === 0 ? label : '', margin)}${line}`,
  );
}

export const rule = (): string => '-'.repeat(PAPER_WIDTH);

/** A heading written into its rule. */
export function heading(text: string): string {
  return `-- ${text} ${'-'.repeat(Math.max(0, PAPER_WIDTH - lengthOf(text) - 4))}`;
}

/** Rows of cells: the first column to the left, the others to the right, two blanks between them if not told otherwise. */
export function table(rows: readonly (readonly string[])[], leftColumns = 1, gap = '  '): string[] {
  const columns = Math.max(0, ...rows.map((row) => row.length));
  const widths = Array.from({ length: columns }, (_, at) =>
    Math.max(...rows.map((row) => lengthOf(row[at] ?? ''))),
  );
  return rows.map((row) =>
    row
      .map((cell, at) => (at < leftColumns ? padEnd(cell, widths[at]) : padStart(cell, widths[at])))
      .join(gap)
      .trimEnd(),
  );
}

/** Two texts on one line, the second at the right margin and cut where it does not fit. */
export function bothEnds(left: string, right: string): string {
  const room = PAPER_WIDTH - lengthOf(left) - 1;
  const cut =
    lengthOf(right) > room
      ? `${Array.from(right)
          .slice(0, room - 1)
          .join('')}\u2026`
      : right;
  return `${left}${' '.repeat(PAPER_WIDTH - lengthOf(left) - lengthOf(cut))}${cut}`;
}

/** Characters as a reader counts them. */
export function lengthOf(text: string): number {
  return Array.from(text).length;
}

export function padEnd(text: string, width: number): string {
  return text + ' '.repeat(Math.max(0, width - lengthOf(text)));
}

export function padStart(text: string, width: number): string {
  return ' '.repeat(Math.max(0, width - lengthOf(text))) + text;
}
