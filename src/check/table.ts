/** Rows under a head, in columns: the first runs left, the others right, as numbers do. */
export function table(
  head: readonly string[],
  rows: readonly (readonly string[])[],
  indent: string,
): readonly string[] {
  const all = [head, ...rows];
  const widths = head.map((_, column) => Math.max(...all.map((row) => (row[column] ?? '').length)));
  return all.map((row) => {
    const cells = row.map((cell, column) => padded(cell, widths[column] ?? 0, column === 0));
    return `${indent}${cells.join('  ')}`.trimEnd();
  });
}

function padded(cell: string, width: number, left: boolean): string {
  const room = ' '.repeat(Math.max(0, width - cell.length));
  return left ? cell + room : room + cell;
}
