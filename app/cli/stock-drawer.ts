import { resolve } from "node:path";
import { Command } from "commander";
import type { DrawerLine } from "../../core/contract/drawer-schemas.ts";
import { HostFailure } from "../../core/contract/failures.ts";
import { QUANTITY_OF, RATING_UNIT } from "../../core/drawer/check-line.ts";
import { unitCost } from "../../core/drawer/stock.ts";
import { formatValue } from "../../core/units.ts";
import { ownDrawerPath } from "../services/drawer-path.ts";
import { openDrawer, type DrawerStore } from "../store/drawer-store.ts";
import { printTable } from "./board-command.ts";
import { CommandFailure, EXIT } from "./failure.ts";

export interface DrawerOption {
  readonly drawer?: string;
  readonly json?: true;
}

/** A command on the drawer. */
export function drawerCommand(name: string, about: string, example: string): Command {
  return new Command(name).description(about).option("--drawer <PATH>", "another drawer file than your own; made where there is none").option("--json", "as JSON").addHelpText("after", `\nExample:\n  bandwright stock ${example}`);
}

/** Works on the drawer, and closes it whatever happens. @throws CommandFailure */
export async function withDrawer<T>(opts: DrawerOption, work: (store: DrawerStore) => Promise<T> | T): Promise<T> {
  try {
    const store = await openDrawer({ path: opts.drawer === undefined ? ownDrawerPath() : resolve(opts.drawer), now: () => new Date() });
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
  const isTheirs = error.code !== "drawer-unusable" && error.code !== "import-cancelled" && error.code !== "file-unwritable";
  return new CommandFailure(error.message, isTheirs ? EXIT.badInput : EXIT.failed);
}

/** Lines as a table for people. */
export function printLines(lines: readonly DrawerLine[]): void {
  const rows = lines.map((line) => {
    const quantity = QUANTITY_OF[line.kind];
    const unit = RATING_UNIT[line.kind];
    const cost = unitCost(line, 1);
    return [
      line.id,
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
