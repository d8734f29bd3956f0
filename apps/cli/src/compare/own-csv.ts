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

/** Rows of such a table from its lines, one at a time: no cell of ours holds a line break. */
export async function* ownCsvStream(lines: AsyncIterable<string>): AsyncGenerator<Record<string, string>> {
  let header: readonly string[] | undefined;
  for await (const line of lines) {
    // With its line end, so that an empty last cell is one.
    const cells = cellsOf(`${line}\n`)[0] ?? [];
    if (header === undefined) header = cells;
    else yield Object.fromEntries(header.map((name, index) => [name, cells[index] ?? ""]));
  }
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
