/**
 * Rows of a table that a run of ours wrote: RFC 4180, one header line.
 *
 * @returns one record a row, by column name; a cell that is not there is empty
 */
export function ownCsvRows(text: string): Record<string, string>[] {
  const lines = cellsOf(text);
  const header = lines[0] ?? [];
  return lines
    .slice(1)
    .map((cells) => Object.fromEntries(header.map((name, index) => [name, cells[index] ?? ""])));
}

function cellsOf(text: string): string[][] {
  const lines: string[][] = [];
  let line: string[] = [];
  // A cell is quoted, with doubled quotes inside, or plain; what follows it ends the cell or the line.
  const cell = /(?:"((?:[^"]|"")*)"|([^",\r\n]*))(,|\r?\n|$)/gy;
  while (cell.lastIndex < text.length) {
    const found = cell.exec(text);
    if (found === null) break;
    line.push(found[1]?.replaceAll('""', '"') ?? found[2] ?? "");
    if (found[3] === ",") continue;
    lines.push(line);
    line = [];
  }
  return lines;
}
