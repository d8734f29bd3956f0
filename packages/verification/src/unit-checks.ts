/** A way in which a column's unit can be mistaken: what the values are too large by. */
export interface UnitMistake {
  readonly factor: number;
  readonly words: string;
}

/** Unit mistakes that a gauge of a step and a tip size can show. */
export function unitMistakes(stepMs: number | undefined, tipMm: number | undefined): readonly UnitMistake[] {
  const mistakes: UnitMistake[] = [
    { factor: 10, words: "values look 10 times too large (tenths of mm?)" },
    { factor: 1 / 10, words: "values look 10 times too small (cm?)" },
    { factor: 100, words: "values look 100 times too large (hundredths of mm?)" },
    { factor: 1 / 100, words: "values look 100 times too small" },
    { factor: 25.4, words: "values look 25.4 times too large (mm read as inches?)" },
    { factor: 1 / 25.4, words: "values look 25.4 times too small (inches read as mm?)" },
  ];
  if (stepMs !== undefined && stepMs <= 30 * 60_000) {
    const minutes = stepMs / 60_000;
    const factor = 60 / minutes;
    const times = Number(factor.toFixed(2));
    mistakes.push({
      factor,
      words: `values look ${times} times too large (mm/h read as mm per ${minutes} min?)`,
    });
    mistakes.push({
      factor: 1 / factor,
      words: `values look ${times} times too small (mm per ${minutes} min read as mm/h?)`,
    });
  }
  if (tipMm !== undefined && tipMm > 0 && (tipMm <= 0.5 || tipMm >= 2)) {
    const times = Number((1 / tipMm).toFixed(2));
    mistakes.push({
      factor: 1 / tipMm,
      words: `values look ${times} times too large (tips of ${tipMm} mm read as mm?)`,
    });
  }
  return mistakes;
}
