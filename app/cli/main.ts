import { Command, CommanderError } from "commander";
import packageJson from "../../package.json" with { type: "json" };
import { bandsCommand } from "./bands.ts";
import { buildCommand } from "./build.ts";
import { checkCommand } from "./check.ts";
import { CommandFailure, EXIT } from "./failure.ts";
import { equationsCommand } from "./equations.ts";
import { fillCommand } from "./fill.ts";
import { matchCommand } from "./match.ts";
import { polesCommand } from "./poles.ts";
import { respondCommand } from "./respond.ts";
import { swapCommand } from "./swap.ts";
import { stockCommand } from "./stock.ts";

/** Runs one command line; resolves with its exit code. Results go to stdout, messages to stderr. */
export async function runCommandLine(args: readonly string[]): Promise<number> {
  const program = new Command("bandwright")
    .description("Design assistant for analogue graphic equalizers, on the command line.")
    .version(packageJson.version)
    .addHelpText("after", "\nExample:\n  bandwright check channel.bandwright\n\nExit codes: 0 done, 1 failed, 2 bad input.");
  for (const command of [checkCommand(), respondCommand(), bandsCommand(), polesCommand(), equationsCommand(), stockCommand(), swapCommand(), fillCommand(), matchCommand(), buildCommand()]) program.addCommand(command);
  for (const command of withSubcommands(program)) command.exitOverride().showHelpAfterError("(--help says what is understood)");
  try {
    await program.parseAsync(args, { from: "user" });
    return EXIT.done;
  } catch (error) {
    // Help and version end here too, with code 0.
    if (error instanceof CommanderError) return error.exitCode === 0 ? EXIT.done : EXIT.badInput;
    if (error instanceof CommandFailure) {
      process.stderr.write(`${error.message}\n`);
      return error.exitCode;
    }
    // The engine's word for values with which there is nothing to compute.
    if (error instanceof RangeError) {
      process.stderr.write(`${error.message}\n`);
      return EXIT.failed;
    }
    process.stderr.write(`bandwright failed unexpectedly: ${error instanceof Error ? (error.stack ?? error.message) : String(error)}\n`);
    return EXIT.failed;
  }
}

function withSubcommands(command: Command): Command[] {
  return [command, ...command.commands.flatMap(withSubcommands)];
}

// A reader that stops early, such as head, is no failure.
process.stdout.on("error", (error: NodeJS.ErrnoException) => process.exit(error.code === "EPIPE" ? EXIT.done : EXIT.failed));
process.exitCode = await runCommandLine(process.argv.slice(2));
