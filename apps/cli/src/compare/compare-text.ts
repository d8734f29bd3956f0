import { counted, decimals } from "../ui/numbers.ts";
import { textTable } from "../ui/table.ts";
import type { Comparison } from "./compare-runs.ts";

const MAX_ROWS = 20;

/** A comparison for people: figures first, then what stands behind them. */
export function compareText(comparison: Comparison): string {
  const { a, b, figures, plan, inputs } = comparison;
  const parts = [
    textTable(
      [
        { head: "" },
        { head: "folder" },
        { head: "title" },
        { head: "status" },
        { head: "version" },
        { head: "run" },
      ],
      [
        ["a", a.folder, a.title, a.status, a.version, a.runDigest.slice(0, 12)],
        ["b", b.folder, b.title, b.status, b.version, b.runDigest.slice(0, 12)],
      ],
    ),
    section(
      "Figures that changed",
      figures.length,
      textTable(
        [
          { head: "table" },
          { head: "of" },
          { head: "figure" },
          { head: "a", align: "right" },
          { head: "b", align: "right" },
          { head: "change", align: "right" },
        ],
        figures
          .slice(0, MAX_ROWS)
          .map((one) => [one.table, one.of, one.figure, shown(one.a), shown(one.b), signed(one.change)]),
      ),
    ),
    section(
      "Plan values that differ",
      plan.length,
      textTable(
        [{ head: "value" }, { head: "a" }, { head: "b" }],
        plan.slice(0, MAX_ROWS).map((one) => [one.path, shown(one.a), shown(one.b)]),
      ),
    ),
    section(
      "Inputs that differ",
      inputs.length,
      textTable(
        [{ head: "input" }, { head: "kind" }, { head: "change" }, { head: "detail" }],
        inputs.slice(0, MAX_ROWS).map((one) => [one.path, one.kind, one.change, one.detail]),
      ),
    ),
    verdict(comparison),
  ];
  return parts.join("\n\n");
}

function section(title: string, count: number, table: string): string {
  if (count === 0) return `${title}: none`;
  const unsaid = count - MAX_ROWS;
  return `${title}: ${count}\n${table}${unsaid > 0 ? `\nand ${unsaid} more (--json lists all)` : ""}`;
}

function verdict({ sameFigures, plan, inputs, a, b }: Comparison): string {
  const behind: string[] = [];
  if (plan.length > 0) behind.push(counted(plan.length, "plan value"));
  if (inputs.length > 0) behind.push(counted(inputs.length, "input"));
  if (a.version !== b.version) behind.push("the program's version");
  const causes = behind.join(" and ");
  if (sameFigures)
    return causes === "" ? "Same figures, same plan, same inputs." : `Same figures, though ${causes} differ.`;
  return causes === ""
    ? "The figures differ, and neither plan nor inputs say why."
    : `The figures differ; so do ${causes}.`;
}

function shown(value: string | number | boolean | null): string {
  if (value === null) return "–";
  return typeof value === "number" ? decimals(value, 4) : String(value);
}

function signed(change: number | null): string {
  if (change === null) return "–";
  const text = decimals(change, 4);
  return change > 0 ? `+${text}` : text;
}
