export * from "./model/catchment.ts";
export * from "./model/errors.ts";
export * from "./model/gauge.ts";
export * from "./model/grid.ts";
export * from "./model/interval.ts";
export * from "./model/pair.ts";
export * from "./model/radar.ts";
