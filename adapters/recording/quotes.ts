/**
 * The cells of one row of CSV (RFC 4180): a cell that begins with a quote ends with one, holds delimiters and line
 * breaks, and its doubled quotes are single ones. A quote within a cell that began without is a character like others.
 * @returns null where the row ends within quotes: it goes on in the next line
 */
export function splitQuoted(row: string, delimiter: string): string[] | null {
  const cells: string[] = [];
  let cell = '';
  let quoted = false;
  let fresh = true; // nothing of the cell has been seen
  for (let i = 0; i < row.length; i++) {
    const mark = row[i]!;
    if (quoted) {
      if (mark !== '"') cell += mark;
      else if (row[i + 1] === '"') {
        cell += '"';
        i++;
      } else quoted = false;
    } else if (mark === '"' && fresh) {
      quoted = true;
      fresh = false;
    } else if (mark === delimiter) {
      cells.push(cell);
      cell = '';
      fresh = true;
    } else {
      cell += mark;
      fresh = false;
    }
  }
  cells.push(cell);
  return quoted ? null : cells;
}
