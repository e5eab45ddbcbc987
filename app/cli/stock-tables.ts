import { basename, join, resolve } from "node:path";
import { fileURLToPath } from "node:url";
import { Option, type Command } from "commander";
import { isHostFailure } from "../../core/contract/failures.ts";
import type { ImportReport } from "../../core/contract/drawer-schemas.ts";
import { IMPORT_FIELDS, type ColumnUse, type Delimiter, type Encoding, type ImportField, type ImportMapping } from "../../core/drawer/mapping.ts";
import { STOCK_KINDS, type StockKind } from "../../core/drawer/stock.ts";
import { openTable, readTable, type Table } from "../services/csv-table.ts";
import { exportTable, importTable, type ImportProgress } from "../services/drawer-tables.ts";
import { writeTable } from "../services/drawer.ts";
import { printJson } from "./board-command.ts";
import { CommandFailure } from "./failure.ts";
import { drawerCommand, withDrawer, type DrawerOption } from "./stock-drawer.ts";

const STARTER = join(fileURLToPath(new URL("../../assets/drawer/", import.meta.url)), "starter.csv");
const DELIMITERS: Readonly<Record<string, Delimiter>> = { comma: ",", semicolon: ";", tab: "\t", bar: "|" };

interface ImportOpts extends DrawerOption {
  readonly map?: readonly string[];
  readonly delimiter?: keyof typeof DELIMITERS;
  readonly encoding?: Encoding;
  readonly kind?: StockKind;
  readonly skipBadRows?: true;
  readonly dryRun?: true;
  readonly starter?: true;
}

/** `stock import FILE`: takes a table in. */
export function stockImportCommand(): Command {
  return drawerCommand("import", "take a table into the drawer: all of it or nothing, unless --skip-bad-rows. Known ids are updated, differences of quantity are booked as counted", 'import shelf.csv --map "Bin=location" "Stock level=quantity" --dry-run')
    .argument("[FILE]", "CSV with a header; delimiter, decimal mark and encoding are found out")
    .option("--map <HEADER=FIELD...>", `what a column holds, where its header does not tell: ${IMPORT_FIELDS.join(", ")}; FIELD:UNIT says what bare numbers are (value:nF, tolerance:%), price:100 from how many pieces a price holds, HEADER= leaves a column out`)
    .addOption(new Option("--delimiter <MARK>", "what stands between cells").choices(Object.keys(DELIMITERS)))
    .addOption(new Option("--encoding <NAME>", "how letters are written").choices(["utf-8", "windows-1252", "utf-16le"]))
    .addOption(new Option("--kind <KIND>", "the kind of all parts that the table does not give one").choices(STOCK_KINDS))
    .option("--skip-bad-rows", "take the sound rows where others are refused")
    .option("--dry-run", "say what would happen, and change nothing")
    .option("--starter", "the starter drawer instead of a file: an invented small workshop")
    .action(async (file: string | undefined, opts: ImportOpts) => {
      if ((file === undefined) === (opts.starter === undefined)) throw new CommandFailure("give a FILE or --starter (--help says what is understood)");
      const path = file === undefined ? STARTER : resolve(file);
      const report = await withDrawer(opts, "made where there is none", async (store) => {
        const { text, encoding } = await readTable(path, opts.encoding ?? null);
        const table = withOptions(await openTable(text, encoding, null, null), opts);
        const delimited = opts.delimiter === undefined ? table : withOptions(await openTable(text, encoding, { ...table.reading, delimiter: DELIMITERS[opts.delimiter] }, null), opts);
        const stop = new AbortController();
        const onInterrupt = (): void => stop.abort();
        process.once("SIGINT", onInterrupt);
        const meter = progressMeter();
        try {
          return await importTable(store, delimited, {
            job: "import",
            label: `Import ${opts.starter ? "the starter drawer" : basename(path)}`,
            note: `import of ${basename(path)}`,
            skipBadRows: opts.skipBadRows === true,
            dryRun: opts.dryRun === true,
            onProgress: meter.show,
            isCancelled: () => stop.signal.aborted,
          });
        } catch (error) {
          if (opts.json && isHostFailure(error, "import-refused")) printJson(error.data);
          throw error;
        } finally {
          meter.end();
          process.off("SIGINT", onInterrupt);
        }
      });
      for (const { row, message } of report.faults) process.stderr.write(`row ${row}: ${message}\n`);
      if (opts.json) printJson(report);
      else process.stdout.write(`${reportText(report, opts.dryRun === true)}\n`);
    });
}

function reportText(report: ImportReport, isDryRun: boolean): string {
  const { rows, added, updated, unchanged, counted, refused } = report;
  const what = `${rows} rows: ${added} lines added, ${updated} updated, ${unchanged} unchanged, ${counted} counted, ${refused} refused`;
  return isDryRun ? `${what} (nothing was changed)` : what;
}

/** The guessed mapping, changed as told. */
function withOptions(table: Table, opts: ImportOpts): Table {
  let columns = [...table.mapping.columns];
  for (const entry of opts.map ?? []) {
    const at = entry.lastIndexOf("=");
    const header = at === -1 ? "" : entry.slice(0, at);
    const column = table.headers.findIndex((one) => one.toLowerCase() === header.trim().toLowerCase());
    if (at === -1) throw new CommandFailure(`--map: must be HEADER=FIELD, got “${entry}”. Put the file before --map`);
    if (column === -1) throw new CommandFailure(`--map: there is no column “${header}”: the table has ${table.headers.join(", ")}`);
    columns = columns.filter((use) => use.column !== column);
    const use = readUse(column, entry.slice(at + 1));
    if (use === null) continue;
    // One column a field; prices may have several.
    columns = [...columns.filter((one) => one.field !== use.field || (use.field === "price" && one.from !== use.from)), use];
  }
  const mapping: ImportMapping = { columns, defaults: { ...table.mapping.defaults, ...(opts.kind === undefined ? {} : { kind: opts.kind }) } };
  return { ...table, mapping };
}

function readUse(column: number, text: string): ColumnUse | null {
  if (text === "") return null;
  const [name = "", detail = ""] = text.split(":", 2);
  const field: ImportField | undefined = IMPORT_FIELDS.find((one) => one.toLowerCase() === name.trim().toLowerCase());
  if (field === undefined) throw new CommandFailure(`--map: there is no field “${name}”: use ${IMPORT_FIELDS.join(", ")}`);
  if (field !== "price") return { column, field, unit: detail.trim(), from: 1 };
  const from = detail === "" ? 1 : Number(detail);
  if (!Number.isSafeInteger(from) || from < 1) throw new CommandFailure(`--map: a price holds from a whole number of pieces, got “${detail}”`);
  return { column, field, unit: "", from };
}

/** One line on a terminal that tells how far it is; nothing anywhere else. */
function progressMeter(): { readonly show: (progress: ImportProgress) => void; readonly end: () => void } {
  if (!process.stderr.isTTY) return { show: () => undefined, end: () => undefined };
  let shown = "";
  return {
    show({ phase, done, total }) {
      const text = `${phase} ${total === 0 ? 0 : Math.floor((done / total) * 100)} %`;
      if (text === shown) return;
      shown = text;
      process.stderr.write(`\r${text.padEnd(20)}`);
    },
    end() {
      if (shown !== "") process.stderr.write(`\r${" ".repeat(20)}\r`);
    },
  };
}

/** `stock export [FILE]`: the whole drawer as a table. */
export function stockExportCommand(): Command {
  return drawerCommand("export", "all lines as CSV, as an import takes them back; --json gives them as JSON", "export my-parts.csv")
    .argument("[FILE]", "where to; standard output where it is left off")
    .option("--replace", "replace a file that is there")
    .action(async (file: string | undefined, opts: DrawerOption & { readonly replace?: true }) => {
      await withDrawer(opts, "made where there is none", async (store) => {
        if (opts.json) {
          const lines = [...store.eachLine()];
          if (file === undefined) printJson({ lines });
          else await writeTable(store, resolve(file), `${JSON.stringify({ lines }, null, 2)}\n`, opts.replace === true);
          return;
        }
        const { text, lines } = exportTable(store);
        if (file === undefined) {
          process.stdout.write(text);
          return;
        }
        await writeTable(store, resolve(file), text, opts.replace === true);
        process.stderr.write(`${lines} lines written to ${file}\n`);
      });
    });
}
