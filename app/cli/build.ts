import { Command } from "commander";
import { isHostFailure } from "../../core/contract/failures.ts";
import { boardProblems, listedProblems } from "../../core/drawer/board-problems.ts";
import { buildBill, buildReference, unitsThere, type Bill } from "../../core/drawer/bill.ts";
import type { DrawerStore } from "../store/drawer-store.ts";
import { loadBoard, printJson, printTable } from "./board-command.ts";
import { linesFor, moneyText, printProblems, readCount, stockText, sumText } from "./choose-command.ts";
import { CommandFailure, EXIT } from "./failure.ts";
import { withDrawer, withDrawerOptions, type DrawerOption } from "./stock-drawer.ts";

interface BuildCommandOpts extends DrawerOption {
  readonly units: string;
  readonly reserve?: true;
  readonly use?: true;
  readonly release?: true;
}

type Booking = "reserve" | "use" | "release";

/** `build FILE --units N`: bill of materials, stock, shopping list; reserves or books the pieces. */
export function buildCommand(): Command {
  return withDrawerOptions(
    new Command("build")
      .description("bill of materials for a number of units, with what is short and what it costs")
      .argument("<FILE>", "project file (.bandwright)")
      .option("--units <N>", "units to build", "1")
      .option("--reserve", "hold the pieces for this project, instead of what it held before")
      .option("--use", "book the pieces as used, held ones first")
      .option("--release", "let go of all that this project holds")
      .addHelpText("after", "\nExample:\n  bandwright build channel.bandwright --units 2 --reserve\n\n--reserve and --use book all pieces or, where some are missing, none (exit 1). `stock undo` takes a booking back."),
    "has to be there",
  ).action(async (file: string, opts: BuildCommandOpts) => {
    const units = readCount(opts.units, "--units", 10_000);
    const bookings = (["reserve", "use", "release"] as const).filter((one) => opts[one]);
    if (bookings.length > 1) throw new CommandFailure("--reserve, --use and --release: one at a time");
    const [booking] = bookings as readonly (Booking | undefined)[];
    const { board } = await loadBoard(file, {});
    const reference = buildReference(board.project);
    const { bill, problems, refusal } = await withDrawer(opts, "has to be there", (store) => {
      if (booking === "release") release(store, reference);
      const lines = linesFor(store, board.project);
      const planned = buildBill(board, lines, units);
      return { bill: planned, problems: boardProblems(board, lines), refusal: booking === "reserve" || booking === "use" ? book(store, reference, planned, booking) : null };
    });
    if (opts.json) printJson({ reference, booked: refusal === null ? (booking ?? null) : null, ...billJson(bill), problems: problems.map((p) => ({ role: p.role.name, line: p.line.id, problems: p.problems })) });
    else {
      printBill(bill);
      printProblems(listedProblems(problems).map(({ role, line, problem }) => ({ where: role.name, line: line.id, problem })));
    }
    if (refusal !== null) throw new CommandFailure(refusal, EXIT.failed);
    if (booking !== undefined) process.stderr.write(bookedText(booking, reference, bill));
  });
}

function bookedText(booking: Booking, reference: string, { units, unassigned }: Bill): string {
  if (booking === "release") return `nothing is held for “${reference}” any more\n`;
  const done = `pieces of ${units} ${units === 1 ? "unit" : "units"} ${booking === "use" ? "booked as used" : "held"} for “${reference}”\n`;
  return unassigned.length === 0 ? done : `${done}but not for ${unassigned.flatMap((u) => u.roles).join(", ")}: no line of the drawer is named there\n`;
}

/** @throws CommandFailure (exit 1) where nothing is held */
function release(store: DrawerStore, reference: string): void {
  if (store.heldBy(reference).size === 0) throw new CommandFailure(`nothing is held for “${reference}”`, EXIT.failed);
  store.release(reference);
}

/**
 * Books all pieces or none.
 * @returns why nothing was booked, where pieces are missing; null where it was
 * @throws CommandFailure (exit 1) where there is nothing to book
 */
function book(store: DrawerStore, reference: string, bill: Bill, booking: "reserve" | "use"): string | null {
  if (bill.rows.length === 0) throw new CommandFailure("no part of the board names a stock line: fill it first (bandwright fill)", EXIT.failed);
  if (bill.rows.some((r) => r.short > 0)) return shortText(store, reference, bill);
  try {
    if (booking === "use") store.use(reference, bill.units, bill.reserve);
    else store.reserve(reference, bill.units, bill.reserve);
    return null;
  } catch (error) {
    // Somebody else took pieces since they were counted, or units planned before need what is not there.
    if (isHostFailure(error, "drawer-short") || isHostFailure(error, "drawer-refused")) return `nothing was booked: ${error.message}`;
    throw error;
  }
}

/** Which lines are short, who holds pieces of them, and how to go on. */
function shortText(store: DrawerStore, reference: string, bill: Bill): string {
  const lines = bill.rows.filter((r) => r.short > 0).map(({ line, short }) => {
    const others = store.line(line.id).holders.filter((holder) => holder.reference !== reference);
    return `${short} of ${line.id}${others.length > 0 ? ` (held by ${others.map((holder) => `${holder.reference}: ${holder.count}`).join(", ")})` : ""}`;
  });
  const there = unitsThere(bill);
  const fewer = there > 0 ? ` There are pieces for ${there} ${there === 1 ? "unit" : "units"}: --units ${there}.` : "";
  return `too few pieces, so nothing was booked: ${lines.join(", ")}.\nThe shopping list says what to buy. When it has come, book it with “bandwright stock move LINE bought COUNT” and run this again.${fewer}`;
}

function billJson(bill: Bill): object {
  return {
    ...bill,
    rows: bill.rows.map((r) => ({ ...r, line: r.line.id, kind: r.line.kind, value: r.line.value, type: r.line.type, supplier: r.line.supplier, orderCode: r.line.orderCode })),
    shopping: bill.shopping.map((g) => ({ ...g, items: g.items.map((i) => ({ ...i, line: i.line.id, orderCode: i.line.orderCode })) })),
  };
}

function printBill(bill: Bill): void {
  const { rows, unassigned, shopping, units } = bill;
  if (rows.length > 0) {
    printTable(
      ["line", "value", "a unit", "in all", "free", "short", "left", "each", "cost"],
      rows.map((r) => [r.line.id, stockText(r.line.kind, r.line.value, r.line.type), String(r.perUnit), String(r.total), String(r.available), String(r.short), String(r.left), moneyText(r.unitCost), moneyText(r.cost)]),
    );
  }
  if (unassigned.length > 0) {
    process.stdout.write("\nWithout a stock line:\n");
    printTable(
      ["part", "a unit", "in all", "roles"],
      unassigned.map((u) => [`${u.kind} ${stockText(u.kind, u.value, u.type)}${u.missing === null ? "" : ` (${u.missing} is not in the drawer)`}`, String(u.perUnit), String(u.total), u.roles.join(", ")]),
    );
  }
  for (const group of shopping) {
    process.stdout.write(`\nTo buy from ${group.supplier === "" ? "anywhere" : group.supplier}:\n`);
    printTable(
      ["line", "order code", "short", "buy", "each", "cost"],
      group.items.map((i) => [i.line.id, i.line.orderCode || "–", String(i.short), `${i.buy}${i.insteadOf === null ? "" : " (cheaper)"}`, moneyText(i.unitCost), moneyText(i.cost)]),
    );
    process.stdout.write(`  ${sumText(group.cost)}\n`);
  }
  process.stdout.write(`\n${units} ${units === 1 ? "unit" : "units"}: ${sumText(bill.cost)}, ${sumText(bill.costPerUnit)} a unit${bill.unpriced.length > 0 ? `; without a price: ${bill.unpriced.join(", ")}` : ""}\n`);
}
