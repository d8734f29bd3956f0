import { RELATIONS } from "@rainreckon/core";
import { writeText } from "@rainreckon/formats";
import { type RelationChart, relationPage, svgRelations } from "@rainreckon/report";
import { counted } from "../ui/numbers.ts";
import type { FittedPairs } from "./fit.ts";

/** Writes the pairs with their fits beside the published relations: SVG or HTML by the ending of the file. */
export async function writeFitChart(file: string, { result, pairs }: FittedPairs): Promise<void> {
  const shown = [...pairs.dbz.keys()].filter(
    (i) => Number.isFinite(pairs.dbz[i]) && (pairs.rateMmPerHour[i] as number) > 0,
  );
  const unseen = pairs.dbz.length - shown.length;
  const chart: RelationChart = {
    title: "Reflectivity and rain rate",
    about: `${counted(shown.length, "pair")}; ${counted(unseen, "pair")} that one side found dry have no place on these axes.`,
    dbz: Float64Array.from(shown, (i) => pairs.dbz[i] as number),
    rateMmPerHour: Float64Array.from(shown, (i) => pairs.rateMmPerHour[i] as number),
    fitted: result.fits.flatMap(({ title, a, b }) =>
      a === null || b === null ? [] : [{ name: title, a, b }],
    ),
    published: RELATIONS.filter(({ phase }) => phase === "rain"),
  };
  const text = /\.html$/i.test(file) ? relationPage(chart) : `${svgRelations("relations", chart).text}\n`;
  await writeText(file, text);
}
