import { existsSync } from "node:fs";
import { resolve } from "node:path";
import { Command } from "commander";
import type { DrawerLine } from "../../core/contract/drawer-schemas.ts";
import { HostFailure, isHostFailure } from "../../core/contract/failures.ts";
import type { Cell } from "../../core/drawer/cells.ts";
import { QUANTITY_OF, RATING_UNIT } from "../../core/drawer/check-line.ts";
import { unitCost } from "../../core/drawer/stock.ts";
import { formatValue } from "../../core/units.ts";
import { ownDrawerPath } from "../services/drawer-path.ts";
import { openDrawer, type DrawerStore } from "../store/drawer-store.ts";
import { printTable } from "./board-command.ts";
import { CommandFailure, EXIT } from "./failure.ts";

/** What every command on the drawer has in common: which drawer, and JSON. */
export interface DrawerOption {
  readonly drawer?: string;
  readonly json?: true;
}

/** Whether a command makes a drawer where there is none. */
export type DrawerUse = "made where there is none" | "has to be there";

/** A command on the drawer itself. */
export function drawerCommand(name: string, about: string, example: string): Command {
  return withDrawerOptions(new Command(name).description(about), "made where there is none").addHelpText("after", `\nExample:\n  bandwright stock ${example}`);
}

/** Adds the options that every command on the drawer takes. */
export function withDrawerOptions(command: Command, use: DrawerUse): Command {
  return command.option("--drawer <PATH>", `another drawer file than your own; ${use}`).option("--json", "as JSON");
}

/** Works on the drawer, and closes it whatever happens. @throws CommandFailure */
export async function withDrawer<T>(opts: DrawerOption, use: DrawerUse, work: (store: DrawerStore) => Promise<T> | T): Promise<T> {
  const path = opts.drawer === undefined ? ownDrawerPath() : resolve(opts.drawer);
  if (use === "has to be there" && !existsSync(path)) throw new CommandFailure(`there is no drawer at ${path}: “bandwright stock import” makes one${opts.drawer === undefined ? ", or name another with --drawer" : ""}`);
  try {
    const store = await openDrawer({ path, now: () => new Date() });
    try {
      return await work(store);
    } finally {
      store.close();
    }
  } catch (error) {
    throw toCommandFailure(error);
  }
}

/** What the host would tell the screen, told on the command line; what the user cannot mend by other input exits with 1. */
export function toCommandFailure(error: unknown): unknown {
  if (!(error instanceof HostFailure)) return error;
  const isTheirs = isHostFailure(error, "drawer-unusable") ? error.data.reason === "not-a-drawer" : error.code !== "import-cancelled" && error.code !== "file-unwritable";
  return new CommandFailure(error.message, isTheirs ? EXIT.badInput : EXIT.failed);
}

/** An option or argument in trade notation. @throws CommandFailure */
export function read<T>(option: string, text: string, reader: (text: string) => Cell<T>): T {
  const cell = reader(text.trim());
  if (!cell.ok) throw new CommandFailure(`${option}: ${cell.message}`);
  return cell.value;
}

/** Lines as a table for people. */
export function printLines(lines: readonly DrawerLine[]): void {
  const rows = lines.map((line) => {
    const quantity = QUANTITY_OF[line.kind];
    const unit = RATING_UNIT[line.kind];
    const cost = unitCost(line, 1);
    return [
      line.retired ? `${line.id} (retired)` : line.id,
      line.value === null || quantity === null ? (line.type ?? "") : formatValue(line.value, quantity, { significant: "exact" }),
      line.tolerance === null ? "" : formatValue(line.tolerance, "ratio"),
      line.rating === null ? "" : `${Number(line.rating.toPrecision(4))}${unit === null ? "" : ` ${unit}`}`,
      line.technology,
      line.location,
      String(line.quantity),
      line.reserved === 0 ? "" : String(line.reserved),
      cost === null ? "" : `${cost} ${line.currency}`.trim(),
    ];
  });
  printTable(["line", "value", "tolerance", "rating", "technology", "location", "pieces", "held", "one costs"], rows);
}
