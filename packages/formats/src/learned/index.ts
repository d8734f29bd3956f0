export { type LearnedArray, type LearnedValue, readLearned, writeLearned } from "./learned-file.ts";
