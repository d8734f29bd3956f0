export * from "./frequency/index.ts";
export * from "./gauges/index.ts";
export * from "./gridded/index.ts";
export * from "./learned/index.ts";
export * from "./radar/index.ts";
export * from "./terrain/index.ts";
export * from "./write/index.ts";
