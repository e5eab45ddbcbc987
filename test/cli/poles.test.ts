/** `poles`, and what every command says of a board that oscillates: the real command line, as a program of its own. */
import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, test, vi } from "vitest";
import { polesAndZeros, type Root } from "../../core/analysis/poles.ts";
import { loopMargins, smallestMargin } from "../../core/analysis/stability.ts";
import { serializeProject } from "../../core/model/serialize.ts";
import { resolveBoard } from "../../core/net/board.ts";
import { bandwright } from "../fixtures/command-line.ts";
import { DEMOS } from "../fixtures/demos.ts";
import { OSCILLATING } from "../fixtures/oscillating.ts";

vi.setConfig({ testTimeout: 30_000 });

let folder = "";
let oscillating = "";
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), "bandwright-poles-"));
  oscillating = join(folder, "oscillating.bandwright");
  writeFileSync(oscillating, serializeProject(OSCILLATING.boosted));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

interface PolesJson {
  readonly poles: readonly Root[];
  readonly zeros: readonly Root[];
}

const demo = (name: string): string => `assets/demo/${name}`;
const plain = (roots: readonly Root[]): Root[] => roots.map(({ re, im }) => ({ re, im }));

async function polesJson(...args: string[]): Promise<PolesJson> {
  const { code, stdout, stderr } = await bandwright("poles", ...args, "--json");
  expect(stderr).toBe("");
  expect(code).toBe(0);
  expect(stdout).not.toMatch(/NaN|Infinity|null/);
  return JSON.parse(stdout) as PolesJson;
}

describe.concurrent("poles", () => {
  test.each(DEMOS)("%s --json: exactly poles and zeros as { re, im }, the core's own numbers, complex ones in pairs", async (name, project) => {
    const json = await polesJson(demo(name));
    expect(Object.keys(json)).toEqual(["poles", "zeros"]);
    const { poles, zeros } = polesAndZeros(resolveBoard(project));
    expect(json).toEqual({ poles: plain(poles), zeros: plain(zeros) });
    for (const root of [...json.poles, ...json.zeros]) {
      expect(Object.keys(root)).toEqual(["re", "im"]);
      expect(typeof root.re === "number" && typeof root.im === "number").toBe(true);
    }
    for (const root of json.poles) {
      expect(root.re).toBeLessThan(0);
      expect(json.poles).toContainEqual({ re: root.re, im: root.im === 0 ? 0 : -root.im });
    }
  });

  test("--set and --all move them", async () => {
    const [name, project] = DEMOS.find(([n]) => n.startsWith("saltmarsh"))!;
    const board = resolveBoard(project);
    const [first, ...rest] = board.chain.flatMap((item) => item.bands.map((b) => b.id));
    const positions = { ...Object.fromEntries(rest.map((id) => [id, 0.25])), [first]: 1 };
    const moved = await polesJson(demo(name), "--all", "0.25", "--set", `${first}=1`);
    expect(moved.poles).toEqual(plain(polesAndZeros(board, { positions }).poles));
    expect(moved.zeros).not.toEqual(plain(polesAndZeros(board).zeros));
  });

  test("as a table: a row each, its frequency and Q, and how well they give the response back", async () => {
    const [name, project] = DEMOS[0];
    const { code, stdout } = await bandwright("poles", demo(name));
    expect(code).toBe(0);
    const { poles, zeros } = polesAndZeros(resolveBoard(project));
    const lines = stdout.trimEnd().split("\n");
    expect(lines.filter((l) => l.startsWith("pole "))).toHaveLength(poles.length);
    expect(lines.filter((l) => l.startsWith("zero "))).toHaveLength(zeros.length);
    expect(lines[0]).toMatch(/re rad\/s .*im rad\/s .*frequency .*Q .*block/);
    expect(lines.at(-1)).toMatch(new RegExp(`^${poles.length} poles, ${zeros.length} zeros; together .* within \\de-\\d+ dB from 10 Hz to 100 kHz$`));
    const complexPair = poles.find((p) => p.im > 0)!;
    expect(stdout).toContain(complexPair.re.toPrecision(6));
    expect(stdout).not.toMatch(/NaN|undefined/);
  });

  test("--help has an example, and a file that is none ends with 2", async () => {
    const help = await bandwright("poles", "--help");
    expect(help.code).toBe(0);
    expect(help.stdout).toContain("bandwright poles channel.bandwright");
    const missing = await bandwright("poles", "no-such.bandwright");
    expect(missing).toMatchObject({ code: 2, stdout: "" });
    expect(missing.stderr).toContain("no-such.bandwright");
  });
});

describe.concurrent("stability", () => {
  test.each(DEMOS)("check %s states the smallest phase margin and its block", async (name, project) => {
    const { code, stdout, stderr } = await bandwright("check", demo(name));
    const least = smallestMargin(loopMargins(resolveBoard(project)))!;
    expect({ code, stderr }).toEqual({ code: 0, stderr: "" });
    expect(stdout).toContain(`smallest phase margin ${least.phaseMargin.toFixed(0)}° (${least.block})`);
  });

  test("check says that a board oscillates and in which loop, and is still a readable file: exit 0", async () => {
    const { code, stdout } = await bandwright("check", oscillating);
    expect(code).toBe(0);
    expect(stdout).toMatch(/unstable: .*right half plane.*“eq”/);
    expect(stdout.trimEnd().split("\n")).toHaveLength(1);
  });

  test.each([["respond", "--json"], ["bands", "--json"], ["poles", "--json"], ["equations", "--json"]])("%s %s warns of it on stderr, marks the result and exits 0", async (...args) => {
    const { code, stdout, stderr } = await bandwright(args[0], oscillating, args[1]);
    expect(code).toBe(0);
    expect(stderr.trimEnd().split("\n")).toEqual([expect.stringMatching(/oscillating\.bandwright: unstable: .*“eq”/)]);
    const result = JSON.parse(stdout) as { readonly unstable?: string; readonly bands?: readonly { readonly boost: object; readonly cut: object }[] };
    expect(result.unstable).toMatch(/right half plane.*“eq”/);
    for (const band of result.bands ?? []) expect(band).toMatchObject({ boost: { unstable: true }, cut: { unstable: true } });
    if (args[0] === "poles") expect((JSON.parse(stdout) as PolesJson).poles.filter((p) => p.re > 0)).toHaveLength(2);
  });

  test("every figure for people is marked, and so is every row of the CSV", async () => {
    const respond = await bandwright("respond", oscillating, "--points", "3");
    const rows = respond.stdout.split("\n");
    for (const row of rows.slice(1, 4)) expect(row.trim()).toMatch(/^\S+( +\S+\?){3}$/);
    expect(respond.stdout).toMatch(/\? means nothing: unstable: .*“eq”/);
    const csv = await bandwright("respond", oscillating, "--points", "3", "--csv");
    expect(csv.stdout.trimEnd().split("\n")).toEqual(["frequency,gain,phase,groupDelay,unstable", ...Array<unknown>(3).fill(expect.stringMatching(/,meaningless$/))]);
    const bands = await bandwright("bands", oscillating);
    expect(bands.stdout).toMatch(/^hi .*\d\?  .*\d\?$/m);
    const equations = await bandwright("equations", oscillating, "--block", "hi");
    expect(equations.stdout).toMatch(/means nothing: unstable: .*“eq”/);
    const poles = await bandwright("poles", oscillating);
    expect(poles.stdout).toMatch(/\nunstable: .*“eq”.*\n$/);
    const drawer = join(folder, "marks.sqlite");
    await bandwright("stock", "import", "--starter", "--drawer", drawer);
    const swap = await bandwright("swap", oscillating, "--role", "hi.seriesR", "--drawer", drawer);
    expect(swap.stdout).toMatch(/means nothing: unstable: .*“eq”/);
    const fill = await bandwright("fill", oscillating, "-o", join(folder, "filled.bandwright"), "--drawer", drawer, "--json");
    expect(JSON.parse(fill.stdout)).toHaveProperty("unstable", expect.stringContaining("“eq”"));
  });

  test("a slider end that oscillates is told of, and only what is read there is marked", async () => {
    const check = await bandwright("check", oscillating, "--all", "0.5");
    expect(check.stdout).toMatch(/smallest phase margin \d+° \(eq\); unstable with hi at full boost\n$/);
    // Its boost is no figure to sum up.
    expect(check.stdout).not.toContain("boost in circuit");
    const equations = await bandwright("equations", oscillating, "--all", "0.5", "--block", "hi");
    expect(equations.stderr).toContain("unstable with hi at full boost");
    expect(equations.stdout).toMatch(/means nothing: unstable with hi at full boost, where figures are read\n$/);
    const asJson = await bandwright("equations", oscillating, "--all", "0.5", "--block", "hi", "--json");
    expect(JSON.parse(asJson.stdout)).toMatchObject({ unstableEnds: [{ id: "hi", end: "boost" }] });
    expect(JSON.parse((await bandwright("equations", oscillating, "--all", "0.5", "--block", "eq", "--json")).stdout)).not.toHaveProperty("unstableEnds");
    const bands = await bandwright("bands", oscillating, "--all", "0.5", "--json");
    expect(bands.stderr).toContain("unstable with hi at full boost");
    const [hi] = (JSON.parse(bands.stdout) as { readonly bands: readonly Readonly<Record<"boost" | "cut", object>>[] }).bands;
    expect(hi.boost).toHaveProperty("unstable", true);
    expect(hi.cut).not.toHaveProperty("unstable");
  });

  test("with the slider where the board is at peace there is nothing to say", async () => {
    const { code, stdout, stderr } = await bandwright("check", oscillating, "--set", "hi=0.5");
    expect({ code, stderr }).toEqual({ code: 0, stderr: "" });
    expect(stdout).toMatch(/smallest phase margin \d+° \(eq\)/);
    const respond = await bandwright("respond", oscillating, "--all", "0.5", "--points", "3");
    expect(respond).toMatchObject({ code: 0, stderr: "" });
  });
});
