/** `equations`: the real command line, as a program of its own. */
import { describe, expect, test, vi } from "vitest";
import { blockIds, boardReport, type BoardReport } from "../../core/analysis/equation-report.ts";
import { respond } from "../../core/analysis/response.ts";
import { resolveBoard } from "../../core/net/board.ts";
import { compileBoard } from "../../core/net/star.ts";
import { bandwright } from "../fixtures/command-line.ts";
import { DEMOS } from "../fixtures/demos.ts";

vi.setConfig({ testTimeout: 30_000 });

const [NAME, PROJECT] = DEMOS.find(([name]) => name.startsWith("saltmarsh"))!;
const FILE = `assets/demo/${NAME}`;
const BOARD = resolveBoard(PROJECT);
const IDS = blockIds(BOARD);
const BAND = BOARD.chain.flatMap((item) => item.bands)[0];

async function done(...args: string[]): Promise<string> {
  const { code, stdout, stderr } = await bandwright("equations", ...args);
  expect(stderr).toBe("");
  expect(code).toBe(0);
  expect(stdout).not.toMatch(/NaN|Infinity|undefined/);
  return stdout;
}

describe.concurrent("equations", () => {
  test.each(DEMOS)("%s: a heading a block, every block of the board, laws with values and results", async (name, project) => {
    const board = resolveBoard(project);
    const out = await done(`assets/demo/${name}`);
    for (const id of blockIds(board)) expect(out).toMatch(new RegExp(`^\\S.*\\(${id}\\)$`, "m"));
    expect(out).toContain("Design laws");
    expect(out.split("\n").filter((l) => l.endsWith(" = 0")).length).toBeGreaterThan(board.chain.length * 3);
    expect(out).toMatch(/^ {4}f0 = 1 \/ \(2·π·√\(L·seriesC\)\) = .* Hz$/m);
  });

  test("--block shows one block alone", async () => {
    const out = await done(FILE, "--block", BAND.id);
    expect(out.split("\n").filter((l) => /^\S/.test(l))).toHaveLength(1);
    expect(out.split("\n")[0]).toContain(`(${BAND.id})`);
    expect(out).toContain(`${BAND.id}.seriesR`);
    for (const id of IDS.filter((i) => i !== BAND.id)) expect(out).not.toContain(`\n${id} (`);
  });

  test("a block that is not there: exit 2, and the list of those that are", async () => {
    const { code, stdout, stderr } = await bandwright("equations", FILE, "--block", "nowhere");
    expect({ code, stdout }).toEqual({ code: 2, stdout: "" });
    expect(stderr).toContain("nowhere");
    for (const id of IDS) expect(stderr).toContain(id);
  });

  test("--at puts numbers in, in trade notation; what is no frequency ends with 2", async () => {
    const out = await done(FILE, "--block", BAND.id, "--at", "1k");
    expect(out).toMatch(/^ {4}v\[.*\] = .* ∠ .*°; currents .*; sum \S+ A$/m);
    expect(await done(FILE, "--block", BAND.id)).not.toContain("; currents");
    for (const bad of ["0", "-5", "loud"]) {
      const { code, stdout, stderr } = await bandwright("equations", FILE, `--at=${bad}`);
      expect({ code, stdout }).toEqual({ code: 2, stdout: "" });
      expect(stderr).toMatch(/^--at: must be a frequency above 0/);
    }
  });

  test("--json is the core's report: frequency, the response's gain there, blocks with sections of lines", async () => {
    const json = JSON.parse(await done(FILE, "--json", "--at", "440")) as BoardReport;
    expect(json).toEqual(boardReport(BOARD, { style: "text", frequency: 440, blocks: IDS }));
    expect(json.gain).toBeCloseTo(respond(compileBoard(BOARD), new Float64Array([440])).gain[0], 9);
    expect(json.blocks.map((b) => b.id)).toEqual(IDS);
    for (const block of json.blocks) for (const section of block.sections) for (const line of section.lines) expect(line.text.length).toBeGreaterThan(0);
    expect((JSON.parse(await done(FILE, "--json", "--block", BAND.id)) as BoardReport)).toMatchObject({ frequency: null, gain: null, blocks: [{ id: BAND.id, kind: BAND.kind }] });
  });

  test("--tex: comments and displayed formulas, nothing else, braces in balance", async () => {
    const lines = (await done(FILE, "--tex")).split("\n").filter((l) => l !== "");
    for (const line of lines) expect(line).toMatch(/^(% .*|\\\[ .* \\\])$/);
    const formulas = lines.filter((l) => l.startsWith("\\["));
    expect(formulas.length).toBeGreaterThan(40);
    for (const formula of formulas) expect(formula.split("{").length).toBe(formula.split("}").length);
    expect(formulas.some((f) => f.includes("\\sqrt{L"))).toBe(true);
  });

  test("--set counts: the track's two parts carry the position of the run", async () => {
    const at = async (position: string): Promise<BoardReport> => JSON.parse(await done(FILE, "--json", "--at", "1k", "--all", "0.5", "--set", `${BAND.id}=${position}`)) as BoardReport;
    const [boosted, cut] = [await at("0.9"), await at("0.1")];
    expect(boosted.gain! - cut.gain!).toBeGreaterThan(0.01);
    expect(boosted).toEqual(boardReport(BOARD, { style: "text", frequency: 1000, blocks: IDS, positions: { ...Object.fromEntries(BOARD.chain.flatMap((i) => i.bands.map((b) => [b.id, 0.5]))), [BAND.id]: 0.9 } }));
  });
});
