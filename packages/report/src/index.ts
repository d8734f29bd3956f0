export { type BudgetChart, type BudgetCurve, budgetPage, svgBudget } from "./charts/budget-chart.ts";
export { svgHyetograph } from "./charts/hyetograph.ts";
export {
  type RelationChart,
  type RelationLine,
  relationPage,
  svgRelations,
} from "./charts/relation-chart.ts";
export { type ScatterPoint, svgScatter } from "./charts/scatter.ts";
export { type CheckBias, type CheckPage, type CheckRadar, type CheckRow, checkPage } from "./check-page.ts";
export { type FrameSeries, FrameStack } from "./data/frame-stack.ts";
export type {
  EventIndexInput,
  EventIndexRow,
  EventPageInput,
  EventPeak,
  EventRunWords,
  EventWords,
  FrequencyCurve,
} from "./event/event-input.ts";
export { renderEventIndex, renderEventPage } from "./event/event-page.ts";
export type {
  AccountLine,
  AdjustmentStatement,
  Caution,
  ChangedSetting,
  CrossValidationStatement,
  DepthFigure,
  DepthRangeFigure,
  EchoStatement,
  GaugeRole,
  GeographicLattice,
  Hyetograph,
  MapLayer,
  MethodChoiceStatement,
  Provenance,
  ProvenanceInput,
  RelationFigure,
  ReportAsset,
  ReportCatchment,
  ReportGauge,
  ReportInput,
  ReportRadar,
  ReportRadarVerdict,
  ReportScore,
  ReportScores,
  StepSeries,
} from "./input.ts";
export { palettePng, type Rgba } from "./map/png.ts";
export { renderReport } from "./report.ts";
export { escapeText, html, type Insert, Markup } from "./text/html.ts";
export { WORDED_SCORES } from "./text/score-words.ts";
