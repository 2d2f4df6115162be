/** Something wrong in a CSV file; lines and columns count from 1. */
export interface CsvMistake {
  readonly line: number;
  readonly column: number;
  readonly wrong: string;
  readonly right: string;
}

export function csvMistakeLine(file: string, { line, column, wrong, right }: CsvMistake): string {
  return `${file}:${line}:${column}: ${wrong}; ${right}`;
}
