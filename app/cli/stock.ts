import { Command } from "commander";
import { stockAddCommand, stockCountCommand, stockMoveCommand, stockUndoCommand } from "./stock-changes.ts";
import { stockMeasureCommand } from "./stock-measure.ts";
import { stockListCommand } from "./stock-list.ts";
import { stockExportCommand, stockImportCommand } from "./stock-tables.ts";

/** `stock …`: the parts library. */
export function stockCommand(): Command {
  const command = new Command("stock")
    .description("the drawer: your parts library, what is in it and what moved")
    .addHelpText("after", "\nExample:\n  bandwright stock list 4k7 film --available\n\nThe drawer is a file in your data folder; --drawer PATH or BANDWRIGHT_DRAWER names another.");
  for (const one of [stockImportCommand(), stockExportCommand(), stockListCommand(), stockAddCommand(), stockMoveCommand(), stockCountCommand(), stockMeasureCommand(), stockUndoCommand()]) command.addCommand(one);
  return command;
}
