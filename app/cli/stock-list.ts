import { InvalidArgumentError, Option, type Command } from "commander";
import { EVERY_LINE, SORT_COLUMNS, type LineFilter, type LineSort } from "../../core/contract/drawer-schemas.ts";
import { STOCK_KINDS, type StockKind } from "../../core/drawer/stock.ts";
import { printJson } from "./board-command.ts";
import { drawerCommand, printLines, withDrawer, type DrawerOption } from "./stock-drawer.ts";

interface ListOpts extends DrawerOption {
  readonly kind?: StockKind;
  readonly sort: LineSort["by"];
  readonly descending?: true;
  readonly available?: true;
  readonly retired?: true;
  readonly limit: number;
}

const WINDOW = 1000;

/** `stock list [WORDS…]`: lines that fit words and values. */
export function stockListCommand(): Command {
  return drawerCommand("list", "lines of the drawer that fit words and values, such as 4k7 film or 100n 63V", "list 100n film --available --sort tolerance")
    .argument("[WORDS...]", "words in any text of a line, and values in trade notation; all have to fit")
    .addOption(new Option("--kind <KIND>", "only this kind").choices(STOCK_KINDS))
    .addOption(new Option("--sort <COLUMN>", "what to sort by").choices(SORT_COLUMNS).default("value"))
    .option("--descending", "the largest first")
    .option("--available", "only lines with pieces that nobody has spoken for")
    .option("--retired", "retired lines too")
    .option("--limit <N>", "at most so many lines", readLimit, 50)
    .action(async (words: readonly string[], opts: ListOpts) => {
      const filter: LineFilter = { ...EVERY_LINE, text: words.join(" ").slice(0, 500), kind: opts.kind === undefined ? [] : [opts.kind], onlyAvailable: opts.available === true, withRetired: opts.retired === true };
      const sort: LineSort = { by: opts.sort, descending: opts.descending === true };
      const { total, lines, isEmpty } = await withDrawer(opts, "made where there is none", (store) => {
        const first = store.lines(filter, sort, 0, Math.min(opts.limit, WINDOW));
        const all = [...first.lines];
        while (all.length < Math.min(opts.limit, first.total)) {
          const next = store.lines(filter, sort, all.length, Math.min(opts.limit - all.length, WINDOW)).lines;
          if (next.length === 0) break;
          all.push(...next);
        }
        const { lines: inUse, retired } = store.info();
        return { total: first.total, lines: all, isEmpty: inUse + retired === 0 };
      });
      if (opts.json) {
        printJson({ total, lines });
        return;
      }
      if (lines.length > 0) printLines(lines);
      if (isEmpty) process.stderr.write("The drawer is empty. Take your own table in with `stock import FILE`, or look around in an invented workshop with `stock import --starter`.\n");
      else if (total > lines.length) process.stderr.write(`${lines.length} of ${total} lines; --limit shows more\n`);
      else if (total === 0) process.stderr.write("No line fits.\n");
    });
}

function readLimit(text: string): number {
  const limit = Number(text);
  if (!/^\d+$/.test(text) || !Number.isSafeInteger(limit) || limit < 1) throw new InvalidArgumentError("It must be a whole number above 0.");
  return limit;
}
