import { displayText } from "@rainreckon/formats";
import Table from "cli-table3";

/** One column of a text table. */
export interface Column {
  readonly head: string;
  /** Numbers stand right, so that their digits line up. */
  readonly align?: "left" | "right";
}

const NO_LINES = {
  top: "",
  "top-mid": "",
  "top-left": "",
  "top-right": "",
  bottom: "",
  "bottom-mid": "",
  "bottom-left": "",
  "bottom-right": "",
  left: "",
  "left-mid": "",
  mid: "",
  "mid-mid": "",
  right: "",
  "right-mid": "",
  middle: "  ",
} as const;

/** A table of plain text: a head, and rows without lines between them. Cells come out harmless. */
export function textTable(columns: readonly Column[], rows: readonly (readonly string[])[]): string {
  const table = new Table({
    head: columns.map((column) => column.head),
    colAligns: columns.map((column) => column.align ?? "left"),
    chars: NO_LINES,
    style: { head: [], border: [], "padding-left": 0, "padding-right": 0 },
  });
  table.push(...rows.map((row) => row.map((cell) => displayText(cell))));
  return table
    .toString()
    .split("\n")
    .map((line) => line.trimEnd())
    .join("\n");
}
