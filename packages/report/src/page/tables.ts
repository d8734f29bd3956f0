import { button, el } from "./dom.ts";

type Order = "ascending" | "descending" | "none";

/** Gives a table heads that sort it and buttons that copy it. Tables of one row need no order. */
export function tableTools(table: HTMLTableElement, holder: Element): void {
  const rows = [...(table.tBodies[0]?.rows ?? [])];
  const heads = [...(table.tHead?.rows[0]?.cells ?? [])];
  if (heads.length === 0) return;
  if (rows.length > 1)
    for (const [column, head] of heads.entries()) sortable(table, rows, heads, head, column);
  const said = el("span", { class: "copied", role: "status" });
  const copy = (name: string, separator: string) =>
    button(`Copy as ${name}`, () => {
      void copyText(tableText(table, separator)).then((done) => {
        said.textContent = done ? "Copied." : "The browser does not let this page copy.";
      });
    });
  const caption = table.caption?.textContent ?? "this table";
  const tools = el(
    "div",
    { class: "table-tools", role: "group", "aria-label": `Copy: ${caption}` },
    copy("CSV", ","),
    copy("TSV", "\t"),
    said,
  );
  // The table and its tools take the place that the table had, in a grid too.
  const home = el("div", { class: "table-home" });
  holder.replaceWith(home);
  home.append(tools, holder);
}

function sortable(
  table: HTMLTableElement,
  rows: readonly HTMLTableRowElement[],
  heads: readonly HTMLTableCellElement[],
  head: HTMLTableCellElement,
  column: number,
): void {
  if (head.classList.contains("chart-column")) return;
  const words = [...head.childNodes];
  const press = button("", () => {
    const before = head.getAttribute("aria-sort") as Order | null;
    const order: Order =
      before === "ascending" ? "descending" : before === "descending" ? "none" : "ascending";
    for (const other of heads) other.removeAttribute("aria-sort");
    if (order !== "none") head.setAttribute("aria-sort", order);
    table.tBodies[0]?.append(...sorted(rows, column, order));
  });
  press.className = "sort";
  press.append(...words, el("span", { class: "sort-sign", "aria-hidden": "true" }));
  head.append(press);
}

/** Rows in order of a column: numbers as numbers, words as words, what is missing always last. */
function sorted(rows: readonly HTMLTableRowElement[], column: number, order: Order): HTMLTableRowElement[] {
  if (order === "none") return [...rows];
  const sign = order === "ascending" ? 1 : -1;
  const keyed = rows.map((row, at) => ({ row, at, text: wordsOf(row.cells[column]) }));
  const numbers = keyed.map(({ text }) => leadingNumber(text));
  // A column is one of numbers where every cell that says something begins with one.
  const numeric = keyed.every(({ text }, at) => isMissing(text) || Number.isFinite(numbers[at]));
  return keyed
    .sort((a, b) => {
      const [first, second] = [isMissing(a.text), isMissing(b.text)];
      if (first || second) return Number(first) - Number(second) || a.at - b.at;
      const difference = numeric
        ? numbers[a.at] - numbers[b.at]
        : a.text.localeCompare(b.text, "en", { numeric: true });
      return sign * difference || a.at - b.at;
    })
    .map(({ row }) => row);
}

function isMissing(text: string): boolean {
  return text === "" || text.startsWith("–");
}

/** The number that a cell begins with, after signs like "≥" and "×". */
export function leadingNumber(text: string): number {
  const found = /^[≥><×]?[\s\u00a0\u202f]*([+\u2212-]?\d[\d\u202f]*(?:\.\d+)?)/.exec(text)?.[1];
  return found === undefined ? Number.NaN : Number(found.replace("\u2212", "-").replace(/[\u202f+]/g, ""));
}

function wordsOf(cell: HTMLTableCellElement | undefined): string {
  return (cell?.textContent ?? "").replace(/\s+/g, " ").trim();
}

/**
 * A table as text, in the order in which it stands. A number loses its thousands' spaces and wears a plain minus;
 * where one bears a mark ("≥", "at cap", a reason for missing), its column is followed by one that holds the marks.
 */
export function tableText(table: HTMLTableElement, separator: string): string {
  const heads = [...(table.tHead?.rows[0]?.cells ?? [])];
  const rows = [...(table.tBodies[0]?.rows ?? [])];
  const columns = heads.flatMap((head, column) => {
    const title = wordsOf(head);
    const texts = rows.map((row) => wordsOf(row.cells[column]));
    if (!head.classList.contains("number")) return [[title, ...texts]];
    const split = texts.map(numberAndMark);
    const numbers = [title, ...split.map(([number]) => number)];
    return split.every(([, mark]) => mark === "")
      ? [numbers]
      : [numbers, [`${title}, mark`, ...split.map(([, mark]) => mark)]];
  });
  return Array.from({ length: rows.length + 1 }, (_, row) =>
    columns.map((column) => field(column[row] ?? "", separator)).join(separator),
  ).join("\r\n");
}

function numberAndMark(text: string): [number: string, mark: string] {
  if (isMissing(text)) return ["", text.replace(/^–\s*(not available: )?/, "")];
  const value = leadingNumber(text);
  if (Number.isNaN(value)) return ["", text];
  const rest = text
    .replace(/[+\u2212-]?\d[\d\u202f]*(?:\.\d+)?/, "")
    .replace(/[\s\u00a0\u202f]+/g, " ")
    .trim();
  return [String(value), rest === "≥" ? "at least" : rest];
}

/** One field: quoted where it must be (RFC 4180), and kept from being read as a formula where it is no number. */
function field(text: string, separator: string): string {
  const isNumber = text !== "" && Number.isFinite(Number(text));
  const safe = !isNumber && /^\s*[=+\-@\uff1d\uff0b\uff0d\uff20]/.test(text) ? `'${text}` : text;
  if (separator === "\t") return safe.replace(/[\t\r\n]+/g, " ");
  return /[",\r\n]/.test(safe) ? `"${safe.replaceAll('"', '""')}"` : safe;
}

/** @returns whether the text is on the clipboard now */
async function copyText(text: string): Promise<boolean> {
  try {
    await navigator.clipboard.writeText(text);
    return true;
  } catch {
    // Pages from a disk may not have a clipboard of their own: then the old way, by a selection.
    const area = el("textarea", { class: "heard", "aria-hidden": "true" });
    area.value = text;
    document.body.append(area);
    area.select();
    const done = document.execCommand("copy");
    area.remove();
    return done;
  }
}
