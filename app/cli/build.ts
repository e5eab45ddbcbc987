import { Command } from "commander";
import { boardProblems, type RoleProblems } from "../../core/drawer/board-problems.ts";
import { buildBill, buildReference, type Bill } from "../../core/drawer/bill.ts";
import { RATING_CAUTION } from "../../core/drawer/stress.ts";
import type { DrawerStore } from "../store/drawer-store.ts";
import { loadBoard, printJson, printTable } from "./board-command.ts";
import { moneyText, readCount, stockText, sumText, withDrawer, withDrawerOptions, type ChooseOpts } from "./choose-command.ts";
import { CommandFailure, EXIT } from "./failure.ts";

interface BuildCommandOpts extends ChooseOpts {
  readonly units: string;
  readonly reserve?: true;
  readonly use?: true;
}

/** `build FILE --units N`: bill of materials, stock, shopping list; reserves or books the pieces. */
export function buildCommand(): Command {
  return withDrawerOptions(
    new Command("build")
      .description("bill of materials for a number of units, with what is short and what it costs")
      .argument("<FILE>", "project file (.bandwright)")
      .requiredOption("--units <N>", "units to build")
      .option("--reserve", "hold the pieces for this project")
      .option("--use", "book the pieces as used, held ones first")
      .addHelpText("after", "\nExample:\n  bandwright build channel.bandwright --units 2 --reserve"),
  ).action(async (file: string, opts: BuildCommandOpts) => {
    const units = readCount(opts.units, "--units", 10_000);
    if (opts.reserve && opts.use) throw new CommandFailure("--reserve and --use: one at a time");
    const { board } = await loadBoard(file, {});
    const reference = buildReference(board.project);
    const { bill, problems } = await withDrawer(opts, (store) => {
      const held = new Map(store.builds().find((b) => b.reference === reference)?.bill.map((entry) => [entry.line, entry.held]));
      const lines = store.allLines();
      const before = buildBill(board, lines, units, { held });
      if (opts.reserve || opts.use) book(store, reference, before, opts.use === true);
      return { bill: before, problems: boardProblems(board, lines) };
    });
    if (opts.json) printJson({ reference, ...billJson(bill), problems: problems.map((p) => ({ role: p.role.name, line: p.line.id, problems: p.problems })) });
    else {
      printBill(bill);
      printProblems(problems);
    }
    if (opts.reserve) process.stderr.write(`pieces for ${units} held for “${reference}”\n`);
    if (opts.use) process.stderr.write(`pieces of ${units} booked as used for “${reference}”\n`);
  });
}

/** @throws CommandFailure (exit 1) where pieces are missing; nothing is booked then */
function book(store: DrawerStore, reference: string, bill: Bill, isUse: boolean): void {
  if (bill.rows.length === 0) throw new CommandFailure("no part of the board names a stock line: fill it first", EXIT.failed);
  const short = bill.rows.filter((r) => r.short > 0);
  if (short.length > 0) throw new CommandFailure(`too few pieces, so nothing was booked: ${short.map((r) => `${r.short} of ${r.line.id}`).join(", ")}`, EXIT.failed);
  const planned = store.builds().find((b) => b.reference === reference);
  const isPlanned = planned?.state === "reserved" && planned.units >= bill.units && isSameBill(planned.bill, bill.reserve);
  if (!isUse || !isPlanned) store.reserve(reference, bill.units, bill.reserve);
  if (isUse) store.use(reference, bill.units);
}

function isSameBill(a: Bill["reserve"], b: Bill["reserve"]): boolean {
  const counts = new Map(a.map((e) => [e.line, e.count]));
  return a.length === b.length && b.every((e) => counts.get(e.line) === e.count);
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

function printProblems(problems: readonly RoleProblems[]): void {
  if (problems.length === 0) return;
  const lines = problems.flatMap(({ role, line, problems: own }) => own.map((p) => `${role.name}, ${line.id}: ${p.level === "fault" ? "does not do: " : ""}${p.message}`));
  process.stdout.write(`\n${lines.join("\n")}\n${RATING_CAUTION}\n`);
}
