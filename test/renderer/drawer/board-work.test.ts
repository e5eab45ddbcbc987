import { mkdtempSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { createElement } from "react";
import { renderToStaticMarkup } from "react-dom/server";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { createDrawer as createService } from "../../../app/services/drawer.ts";
import { createPathGuard } from "../../../app/services/path-guard.ts";
import { createHost } from "../../../app/host.ts";
import { EVERY_LINE } from "../../../core/contract/drawer-schemas.ts";
import { respond } from "../../../core/analysis/response.ts";
import { buildBill, buildReference } from "../../../core/drawer/bill.ts";
import { boardProblems, listedProblems } from "../../../core/drawer/board-problems.ts";
import { fillBoard } from "../../../core/drawer/fill.ts";
import { matchPieces } from "../../../core/drawer/match.ts";
import { boardRoles, filledProject } from "../../../core/drawer/roles.ts";
import { emptyLine } from "../../../core/drawer/stock.ts";
import { RATING_CAUTION } from "../../../core/drawer/stress.ts";
import { rankSwaps } from "../../../core/drawer/swap.ts";
import type { Project } from "../../../core/model/project.ts";
import { restoreProject } from "../../../core/model/restore.ts";
import { resolveBoard } from "../../../core/net/board.ts";
import { compileBoard } from "../../../core/net/star.ts";
import { fillingsOf } from "../../../renderer/drawer/FillPanel.tsx";
import { ghostOf } from "../../../renderer/drawer/ghost.ts";
import { measuredFillings } from "../../../renderer/drawer/MatchPanel.tsx";
import { ProblemList } from "../../../renderer/drawer/ProblemList.tsx";
import { shoppingCsv, shoppingText } from "../../../renderer/drawer/shopping.ts";
import { linesForBoard, linesForRole, namedLines, piecesForBoard } from "../../../renderer/drawer/stock-query.ts";
import { candidateName, effectText, leftText, worstText } from "../../../renderer/drawer/swap-text.ts";
import { withColumn } from "../../../renderer/drawer/ImportMappingTable.tsx";
import { createHostClient, type HostClient } from "../../../renderer/host/client.ts";
import { CHECKOUT } from "../../helpers/app.ts";
import { createFakeChannel } from "../../helpers/fake-channel.ts";
import { fakeHandlers } from "../../helpers/fake-handlers.ts";

let host: HostClient;
let project: Project;
let folder: string;
let closeDrawer: () => Promise<void>;
const RANGE = { from: 20, to: 20e3 };

beforeAll(async () => {
  project = restoreProject(readFileSync(`${CHECKOUT}assets/demo/saltmarsh-voice-channel.bandwright`, "utf8")).project;
  folder = mkdtempSync(join(tmpdir(), "bandwright-drawer-"));
  const drawer = createService({ guard: createPathGuard([]), drawerPath: `${folder}/drawer.sqlite`, starterPath: `${CHECKOUT}assets/drawer/starter.csv`, now: () => new Date(), emit: () => undefined });
  host = createHostClient(createFakeChannel(createHost({ ...fakeHandlers(), ...drawer.handlers }, (error) => { throw error; })));
  closeDrawer = drawer.close;
  await host.call("drawer.starter", { job: "test" });
});
afterAll(async () => {
  await closeDrawer();
  rmSync(folder, { recursive: true, force: true });
});

describe("a board and the starter drawer", () => {
  test("the lines that are asked for are enough to fill it as from the whole drawer", async () => {
    const board = resolveBoard(project);
    const some = await linesForBoard(host, board);
    const { lines: every } = await host.call("drawer.lines", { filter: EVERY_LINE, sort: { by: "id", descending: false }, offset: 0, limit: 1000 });
    const [a, b] = [fillBoard(board, some), fillBoard(board, every)];
    expect(a.placed.map((p) => [p.role.name, p.line.id])).toEqual(b.placed.map((p) => [p.role.name, p.line.id]));
    expect(a.error).toBe(b.error);
    // What the panel puts into the document is what the filling says.
    expect(filledProject(project, fillingsOf(a))).toEqual(a.project);
  });

  test("the dotted curve is the response with the candidate in place, whatever the sliders do meanwhile", async () => {
    const board = resolveBoard(project);
    const role = boardRoles(board).find((r) => r.name === "b1k.seriesC")!;
    const { candidates } = rankSwaps(board, role, await linesForRole(host, board, role, false));
    const other = candidates.find((c) => c.value !== role.value)!;
    const moved = { ...project, blocks: project.blocks.map((b) => (b.id === "b1k" ? { ...b, slider: { ...b.slider!, position: 0.9 } } : b)) };
    const fillings = [{ role, filling: other.filling }];
    const ghost = ghostOf(moved, { label: candidateName(other), change: (p) => filledProject(p, fillings) }, ["b1k"], RANGE)!;
    const wanted = respond(compileBoard(resolveBoard(filledProject(moved, fillings))), ghost.total.frequency);
    for (const i of [0, 120, 240, 360, 480]) expect(ghost.total.gain[i]).toBeCloseTo(wanted.gain[i], 9);
    expect(Math.max(...ghost.alone!.gain)).toBeGreaterThan(6);
    expect(ghostOf({ ...moved, wires: [] }, { label: "", change: (p) => p }, [], RANGE)).toBeNull();
    expect(effectText(other)).toMatch(/^peak.*centre.*Q/);
    expect(worstText(0)).toBe("response unchanged");
    // What is left is what the bill says of the board with it, one unit built.
    const row = buildBill(resolveBoard(filledProject(project, fillings)), other.lines, 1).rows.find((r) => r.line.id === other.lines[0].id)!;
    expect(leftText(other)).toBe(`${row.left} left`);
    expect(leftText({ ...other, joined: "series", isInPlace: true })).toBe(`in place, two in series, ${row.left} left`);
  });

  test("pieces that the board's own build holds are there for it", async () => {
    const board = resolveBoard(project);
    const role = boardRoles(board).find((r) => r.name === "b1k.seriesC")!;
    const before = await linesForRole(host, board, role, false);
    const reference = buildReference(project);
    const all = before.map((line) => ({ line: line.id, count: line.quantity }));
    const { step } = await host.call("drawer.reserve", { reference, units: 1, bill: all });
    expect(await linesForRole(host, board, role, false)).toEqual(before);
    expect((await linesForRole(host, board, role, true)).filter((line) => before.some((b) => b.id === line.id))).toHaveLength(before.length);
    const other = resolveBoard({ ...project, name: "Other board" });
    expect(rankSwaps(other, role, await linesForRole(host, other, role, false)).candidates).toEqual([]);
    await host.call("drawer.undo", { step });
  });

  test("pairs are sought among every line of the kind", async () => {
    const board = resolveBoard(project);
    const role = boardRoles(board).find((r) => r.name === "b1k.seriesC")!;
    const { total } = await host.call("drawer.lines", { filter: { ...EVERY_LINE, kind: ["capacitor"], onlyAvailable: true }, sort: { by: "id", descending: false }, offset: 0, limit: 1 });
    const lines = await linesForRole(host, board, role, true);
    expect(lines).toHaveLength(total);
    const pair = rankSwaps(board, role, lines, { pairs: true, most: 24 }).candidates.find((c) => c.joined !== null)!;
    expect(candidateName(pair)).toContain(pair.joined === "series" ? " + " : " ∥ ");
  });

  test("lines that the drawer does not have are left out, and the rest is billed", async () => {
    const filled = fillBoard(resolveBoard(project), await linesForBoard(host, resolveBoard(project))).project;
    const strange = { ...filled, blocks: filled.blocks.map((b) => (b.id === "b1k" ? { ...b, parts: { ...b.parts, seriesR: { ...b.parts!.seriesR, stock: "R-NOWHERE" } } } : b)) };
    const board = resolveBoard(strange);
    const lines = await namedLines(host, board);
    expect(lines.map((l) => l.id)).not.toContain("R-NOWHERE");
    const bill = buildBill(board, lines, 40);
    expect(bill.unassigned.map((row) => row.missing)).toEqual(["R-NOWHERE"]);
    const text = shoppingText(bill, strange.name);
    expect(text).toContain(`Shopping list: ${strange.name}, 40 units`);
    const rows = shoppingCsv(bill).trim().split("\r\n");
    expect(rows).toHaveLength(1 + bill.shopping.reduce((sum, group) => sum + group.items.length, 0));
    for (const group of bill.shopping) for (const item of group.items) expect(text).toContain(`${item.buy} × ${item.line.id}`);
    // Each finding is of a line that the board names, faults first.
    const findings = listedProblems(boardProblems(board, lines));
    for (const { role, line } of findings) expect([role.stock, role.part?.second?.stock]).toContain(line.id);
  });

  test("matching writes what was measured beside the values, and says what it is worth", async () => {
    const { project: filled } = fillBoard(resolveBoard(project), await linesForBoard(host, resolveBoard(project)));
    const line = filled.blocks.find((b) => b.id === "b1k")!.parts!.seriesR.stock!;
    const values = [455, 462, 468, 471, 474, 479, 483, 490, 495];
    await host.call("drawer.putPieces", { pieces: values.map((value, i) => ({ id: null, line, mark: String(i + 1), value, frequency: null })) });
    const board = resolveBoard(filled);
    const result = matchPieces(board, await piecesForBoard(host, board));
    expect(result.matched.length).toBeGreaterThan(3);
    expect(result.error).toBeLessThanOrEqual(result.random!.best);
    const written = filledProject(filled, measuredFillings(result));
    expect(written).toEqual(result.project);
    // No value changes by it.
    for (const { role } of result.matched) expect(written.blocks.find((b) => b.id === role.block)!.parts![role.role].value).toBe(role.value);
  });

  test("an underrated capacitor is found out", async () => {
    const weak = (await host.call("drawer.candidates", { kind: "capacitor", value: 1e-5, within: 0.5, type: null, technology: [], ratingFrom: null, toleranceTo: null, availableFrom: 0, limit: 50 })).lines[0];
    const line = { ...weak, technology: "film", rating: 1 };
    const blocks = project.blocks.map((b) => (b.id === "b1k" ? { ...b, parts: { ...b.parts, seriesC: { ...b.parts!.seriesC, stock: line.id } } } : b));
    const [first] = listedProblems(boardProblems(resolveBoard({ ...project, blocks }), [line])).filter(({ problem }) => problem.about !== "value");
    expect(first).toMatchObject({ problem: { level: "fault", about: "rating" }, role: { name: "b1k.seriesC" } });
  });
});

describe("what is to be weighed", () => {
  const shown = (about: "taper" | "rating", level: "note" | "fault"): string => {
    const line = { ...emptyLine("P-1", "potentiometer"), value: 10e3, quantity: 9, reserved: 0 };
    const roles = boardRoles(resolveBoard(project)).filter((role) => role.kind === "potentiometer").slice(0, 2);
    return renderToStaticMarkup(createElement(ProblemList, { found: roles.map((role) => ({ role, line, problem: { level, about, message: "so it is" } })) }));
  };

  test("is said once of all places, and the caution about ratings stands beside ratings alone", () => {
    const note = shown("taper", "note");
    expect(note.match(/<li>/g)).toHaveLength(1);
    expect(note).toContain("· <strong>63 Hz: track; 125 Hz: track</strong>, P-1: so it is");
    expect(note).not.toContain(RATING_CAUTION.slice(0, 30));
    expect(shown("rating", "fault")).toContain("✕ <strong>");
    expect(shown("rating", "fault")).toContain(RATING_CAUTION.slice(0, 30));
  });
});

describe("shopping lists", () => {
  test("cells are quoted as the standard has it, and no cell is a formula", () => {
    const line = { id: '=1+1"', kind: "resistor", value: 100, type: null, tolerance: null, rating: null, technology: "a, b", temperatureCoefficient: null, windingR: null, package: "", location: "", prices: [], currency: "", supplier: "Q", orderCode: "", notes: "", quantity: 0, reserved: 0 } as const;
    const csv = shoppingCsv({ shopping: [{ supplier: "Q", cost: [], items: [{ line, short: 3, buy: 3, unitCost: null, cost: null, insteadOf: null }] }] });
    expect(csv.split("\r\n")[1]).toBe(`Q,,"'=1+1""","100R a, b",3,3,,,`);
  });
});

describe("the mapping of an import", () => {
  const mapping = { columns: [{ column: 0, field: "id", unit: "", from: 1 }, { column: 1, field: "value", unit: "nF", from: 1 }], defaults: { kind: null, currency: "" } } as const;

  test("a field moves to the column that it is given, and keeps its unit only there", () => {
    expect(withColumn(mapping, 2, "value").columns).toEqual([{ column: 0, field: "id", unit: "", from: 1 }, { column: 2, field: "value", unit: "", from: 1 }]);
    expect(withColumn(mapping, 1, "value", { unit: "µF" }).columns[1]).toEqual({ column: 1, field: "value", unit: "µF", from: 1 });
    expect(withColumn(mapping, 1, null).columns).toHaveLength(1);
  });

  test("prices may fill several columns", () => {
    const two = withColumn(withColumn(mapping, 3, "price"), 4, "price", { from: 100 });
    expect(two.columns.filter((use) => use.field === "price").map((use) => [use.column, use.from])).toEqual([[3, 1], [4, 100]]);
  });
});
