import { type FaultKind, InputError } from "@rainreckon/core";
import type { Command, CommanderError } from "commander";
import { z } from "zod";
import { flags } from "./options.ts";
import { nearest } from "./text/nearest.ts";
import type { Terminal } from "./ui/terminal.ts";

/** Thrown where the parser has done all there is to do: help, version or a schema was printed. */
export class NothingLeft extends Error {}

/**
 * A new command under another, with what all commands share: examples after the help, wrong usage told in
 * three parts with the nearest thing that exists.
 *
 * @param usage - name and arguments: "survey <path...>"
 */
export function addCommand(
  parent: Command,
  usage: string,
  about: string,
  examples: readonly string[],
): Command {
  const command = parent.command(usage).description(about);
  command.addHelpText(
    "after",
    `\nExamples:\n${examples.map((example) => `  ${example}`).join("\n")}\n\n${EXIT_WORDS}`,
  );
  return speakPlainly(command);
}

/** What a command's exit status says; the same words in every help. */
export const EXIT_WORDS = `Exit status: 0 done, what was left out counted on stderr; 1 failed midway; 2 wrong usage or plan;
3 no usable input; 130 interrupted.`;

/** Makes a command throw its usage errors as InputError instead of printing and leaving. */
export function speakPlainly(command: Command): Command {
  return command
    .exitOverride((error) => {
      throw usageError(error, command);
    })
    .configureOutput({ outputError: () => undefined, writeErr: () => undefined });
}

/** The flag that prints the schema of a command's --json, before any argument is asked for. */
export function addSchemaFlag(command: Command, schema: z.ZodType): void {
  command.addOption(flags.schema());
  command.on("option:schema", () => {
    process.stdout.write(`${JSON.stringify(z.toJSONSchema(schema), null, 2)}\n`);
    throw new NothingLeft();
  });
}

/** Prints a result as JSON, checked against the schema that is published for it. */
export function printJson<T>(terminal: Terminal, schema: z.ZodType<T>, value: T): void {
  terminal.result(JSON.stringify(schema.parse(value), null, 2));
}

const USAGE: { readonly kind: FaultKind } = { kind: "usage" };

function usageError(error: CommanderError, command: Command): Error {
  if (error.code === "commander.helpDisplayed" || error.code === "commander.version")
    return new NothingLeft();
  const where = `command line, ${fullName(command)}`;
  const help = `see ${fullName(command)} --help`;
  const message = error.message.replace(/^error: /, "").replace(/\n[\s\S]*$/, "");
  if (error.code === "commander.help") {
    const names = command.commands.map((one) => one.name()).join(", ");
    return new InputError("a command is missing", where, `add one of: ${names}; ${help}`, USAGE);
  }
  if (error.code === "commander.unknownOption") {
    const flag = /'([^']*)'/.exec(message)?.[1] ?? "";
    const meant = nearest(flag.replace(/=.*$/, ""), flagNames(command));
    return new InputError(
      `there is no flag ${flag}`,
      where,
      meant === undefined ? help : `did you mean ${meant}?`,
      USAGE,
    );
  }
  if (error.code === "commander.unknownCommand") {
    const name = /'([^']*)'/.exec(message)?.[1] ?? "";
    const names = command.commands.map((one) => one.name());
    const meant = nearest(name, names);
    const fix = meant === undefined ? `the commands are ${names.join(", ")}` : `did you mean "${meant}"?`;
    return new InputError(`there is no command "${name}"`, where, fix, USAGE);
  }
  if (error.code === "commander.missingArgument") {
    const wanted = command.registeredArguments.find(
      ({ required }, k) => required && command.args[k] === undefined,
    );
    return new InputError(`${fullName(command)} needs a <${wanted?.name() ?? "path"}>`, where, help, USAGE);
  }
  if (error.code === "commander.missingMandatoryOptionValue") {
    const flag = /'(--[\w-]+)/.exec(message)?.[1] ?? "a flag";
    return new InputError(`${fullName(command)} needs ${flag}`, where, help, USAGE);
  }
  const [what, advice] = message.split(/ is invalid\. /);
  if (advice !== undefined) return new InputError(`${what} does not fit`, where, advice, USAGE);
  return new InputError(message, where, help, USAGE);
}

function fullName(command: Command): string {
  return command.parent === null ? command.name() : `${fullName(command.parent)} ${command.name()}`;
}

function flagNames(command: Command): string[] {
  const own = command.options.flatMap((option) =>
    [option.long, option.short].filter((name) => name !== undefined),
  );
  return [...own, "--help", ...(command.parent === null ? [] : flagNames(command.parent))];
}
