import { EXIT } from "./exit.ts";
import { runProgram } from "./program.ts";

// Whoever reads our output may stop early (a pager, `head`): that ends the command, and is no error.
for (const stream of [process.stdout, process.stderr]) {
  stream.on("error", (error: NodeJS.ErrnoException) => {
    if (error.code === "EPIPE") process.exit(EXIT.done);
    throw error;
  });
}

process.on("SIGINT", () => {
  process.stderr.write("\ninterrupted\n");
  process.exit(EXIT.interrupted);
});

// The status is set and not forced, so that a long result reaches a slow pipe whole.
process.exitCode = await runProgram(process.argv.slice(2));
