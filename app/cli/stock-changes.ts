import { Option, type Command } from "commander";
import { readCoefficient, readCurrency, readPrices, readQuantity, readRating, readTolerance, readValue, readWinding, type Cell } from "../../core/drawer/cells.ts";
import { QUANTITY_OF, RATING_UNIT } from "../../core/drawer/check-line.ts";
import { MOVEMENT_KINDS, STOCK_KINDS, type MovementKind, type StockKind, type StockLine } from "../../core/drawer/stock.ts";
import { printJson } from "./board-command.ts";
import { CommandFailure } from "./failure.ts";
import { drawerCommand, printLines, read, withDrawer, type DrawerOption } from "./stock-drawer.ts";

interface AddOpts extends DrawerOption {
  readonly kind: StockKind;
  readonly value?: string;
  readonly type?: string;
  readonly tolerance?: string;
  readonly rating?: string;
  readonly technology?: string;
  readonly tempco?: string;
  readonly winding?: string;
  readonly package?: string;
  readonly location?: string;
  readonly quantity?: string;
  readonly prices?: string;
  readonly currency?: string;
  readonly supplier?: string;
  readonly orderCode?: string;
  readonly notes?: string;
}

/** `stock add ID`: a new line. */
export function stockAddCommand(): Command {
  return drawerCommand("add", "add a line to the drawer", "add C-100N-PET --kind capacitor --value 100n --tolerance 5% --rating 63V --technology film --quantity 40")
    .argument("<ID>", "your own name for it")
    .addOption(new Option("--kind <KIND>", "what it is").choices(STOCK_KINDS).makeOptionMandatory())
    .option("--value <VALUE>", "in trade notation: 4k7, 100n, 10m")
    .option("--type <TYPE>", "of an op amp, such as TL072")
    .option("--tolerance <T>", "such as 5%")
    .option("--rating <R>", "such as 0.25W or 63V")
    .option("--technology <TEXT>", "film, C0G, electrolytic, …; a track's taper too: carbon, linear")
    .option("--tempco <TC>", "temperature coefficient, such as 50ppm")
    .option("--winding <OHMS>", "winding resistance of an inductor, such as 12")
    .option("--package <TEXT>", "package or lead pitch")
    .option("--location <TEXT>", "where it lies")
    .option("--quantity <N>", "pieces there; none where not given")
    .option("--prices <BREAKS>", "such as 0.10 or 1:0.10;100:0.06")
    .option("--currency <CODE>", "such as EUR")
    .option("--supplier <TEXT>", "who sells it")
    .option("--order-code <TEXT>", "the supplier's name for it")
    .option("--notes <TEXT>", "whatever else is worth knowing")
    .action(async (id: string, opts: AddOpts) => {
      const { line, quantity } = readLine(id, opts);
      const added = await withDrawer(opts, "made where there is none", (store) => store.addLine(line, quantity));
      if (opts.json) printJson(added);
      else printLines([added.line]);
    });
}

function readLine(id: string, opts: AddOpts): { readonly line: StockLine; readonly quantity: number } {
  const quantityName = QUANTITY_OF[opts.kind];
  const prices = readOptional("--prices", opts.prices, readPrices);
  const line: StockLine = {
    id: id.trim(),
    kind: opts.kind,
    value: quantityName === null ? (opts.value === undefined ? null : noValue()) : readOptional("--value", opts.value, (text) => readValue(text, "", quantityName)),
    type: opts.type ?? null,
    tolerance: readOptional("--tolerance", opts.tolerance, (text) => readTolerance(text, /^\d*\.?\d+$/.test(text) && Number(text) >= 1 ? "%" : "")),
    rating: readOptional("--rating", opts.rating, (text) => readRating(text, RATING_UNIT[opts.kind] ?? "")),
    technology: opts.technology ?? "",
    temperatureCoefficient: readOptional("--tempco", opts.tempco, (text) => readCoefficient(text, "ppm")),
    windingR: readOptional("--winding", opts.winding, (text) => readWinding(text, "")),
    package: opts.package ?? "",
    location: opts.location ?? "",
    prices: prices?.prices ?? [],
    currency: readOptional("--currency", opts.currency, readCurrency) ?? prices?.currency ?? "",
    supplier: opts.supplier ?? "",
    orderCode: opts.orderCode ?? "",
    notes: opts.notes ?? "",
  };
  return { line, quantity: readOptional("--quantity", opts.quantity, readQuantity) ?? 0 };
}

function noValue(): never {
  throw new CommandFailure("--value: an op amp has a --type, and no value");
}

/** An option that may be left out. */
function readOptional<T>(option: string, text: string | undefined, reader: (text: string) => Cell<T>): T | null {
  return text === undefined ? null : read(option, text, reader);
}

interface MoveOpts extends DrawerOption {
  readonly for?: string;
  readonly note?: string;
}

/** `stock move ID KIND COUNT`: books a movement. */
export function stockMoveCommand(): Command {
  return drawerCommand("move", "book pieces as bought, used, scrapped, reserved or released", 'move R-4K7-MF25 used 2 --for "Voice channel"')
    .argument("<ID>", "the line")
    .argument("<KIND>", MOVEMENT_KINDS.filter((kind) => kind !== "counted").join(", "))
    .argument("<COUNT>", "number of pieces")
    .option("--for <REFERENCE>", "project or build that they belong to")
    .option("--note <TEXT>", "why")
    .action(async (id: string, kind: string, count: string, opts: MoveOpts) => {
      const wanted = MOVEMENT_KINDS.find((one) => one === kind && one !== "counted");
      if (wanted === undefined) throw new CommandFailure(`there is no movement “${kind}”: use ${MOVEMENT_KINDS.filter((one) => one !== "counted").join(", ")}, or stock count`);
      await move(id, wanted, count, opts);
    });
}

/** `stock count ID COUNT`: what was found there. */
export function stockCountCommand(): Command {
  return drawerCommand("count", "book what you have counted of a line", "count R-4K7-MF25 83")
    .argument("<ID>", "the line")
    .argument("<COUNT>", "pieces found, held ones included")
    .option("--note <TEXT>", "why it differs")
    .action(async (id: string, count: string, opts: MoveOpts) => move(id, "counted", count, opts));
}

async function move(line: string, kind: MovementKind, text: string, opts: MoveOpts): Promise<void> {
  const count = read("COUNT", text, readQuantity);
  const moved = await withDrawer(opts, "made where there is none", (store) => store.move([{ line, kind, count, reference: opts.for?.trim() ?? "", note: opts.note ?? "" }]));
  if (opts.json) printJson(moved);
  else printLines(moved.lines);
}

function readStep(text: string): Cell<number> {
  const step = readQuantity(text);
  return step.ok ? step : { ok: false, message: `“${text}” is no number of a step` };
}

/** `stock undo [STEP]`: takes the latest change back. */
export function stockUndoCommand(): Command {
  return drawerCommand("undo", "take a step back: the latest, or the one with this number (--json of a change gives it)", "undo")
    .argument("[STEP]", "the step's number")
    .action(async (text: string | undefined, opts: DrawerOption) => {
      const undone = await withDrawer(opts, "made where there is none", async (store) => {
        const step = text === undefined ? store.steps(1000).find((one) => one.undoes === null && one.undoneBy === null)?.id : read("STEP", text, readStep);
        if (step === undefined) throw new CommandFailure("there is nothing to undo");
        return store.undo(step);
      });
      if (opts.json) printJson(undone);
      else process.stdout.write(`${undone.label}\n`);
    });
}
