/** The real command line, as a program of its own. */
import { mkdirSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, test, vi } from "vitest";
import { bandFigures, type BandFigures } from "../../core/analysis/bands.ts";
import { logFrequencies, respond, type Response } from "../../core/analysis/response.ts";
import { restoreProject } from "../../core/model/restore.ts";
import { serializeProject } from "../../core/model/serialize.ts";
import { resolveBoard } from "../../core/net/board.ts";
import { compileBoard } from "../../core/net/star.ts";
import { BROKEN_FILES } from "../fixtures/broken-files.ts";
import { bandwright, bandwrightHead, type Ended } from "../fixtures/command-line.ts";
import { bandOf, oneBus, tenBandBoard } from "../helpers/boards.ts";

vi.setConfig({ testTimeout: 30_000 });

const EXAMPLE = "test/fixtures/example.bandwright";
const DEMOS = readdirSync(new URL("../../assets/demo", import.meta.url)).filter((name) => name.endsWith(".bandwright")).map((name) => `assets/demo/${name}`);
const SALTMARSH = "assets/demo/saltmarsh-voice-channel.bandwright";
const boardOf = (path: string) => resolveBoard(restoreProject(readFileSync(new URL(`../../${path}`, import.meta.url), "utf8")).project);
const saltmarsh = boardOf(SALTMARSH);
const BANDS = saltmarsh.chain.flatMap((item) => item.bands.map((b) => b.id));

let folder = "";
beforeAll(() => void (folder = mkdtempSync(join(tmpdir(), "bandwright-cli-"))));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function write(name: string, content: string | Uint8Array): string {
  const path = join(folder, name);
  writeFileSync(path, content);
  return path;
}

type Columns = { readonly [K in keyof Response]: number[] };

function done(ended: Ended): string {
  expect(ended.stderr).toBe("");
  expect(ended.code).toBe(0);
  return ended.stdout;
}

/** Bad input: code 2, nothing on stdout, words on stderr. */
function refused(ended: Ended, says: RegExp): void {
  expect(ended.stderr).toMatch(says);
  expect(ended.stderr).not.toMatch(/\bat .*:\d+:\d+|unexpectedly/);
  expect(ended.stdout).toBe("");
  expect(ended.code).toBe(2);
}

const responseJson = async (...args: string[]): Promise<Columns> => JSON.parse(done(await bandwright("respond", ...args, "--json"))) as Columns;
const plain = (response: Response): Columns => ({ frequency: [...response.frequency], gain: [...response.gain], phase: [...response.phase], groupDelay: [...response.groupDelay] });
const computed = (positions: Readonly<Record<string, number>> = {}, from = 10, to = 40e3, points = 481): Columns => plain(respond(compileBoard(saltmarsh, { positions }), logFrequencies(from, to, points)));

describe.concurrent("check", () => {
  test.each([EXAMPLE, ...DEMOS])("%s is clean: one line on stdout", async (path) => {
    const out = done(await bandwright("check", path));
    expect(out.trimEnd().split("\n")).toHaveLength(1);
    expect(out).toContain(restoreProject(readFileSync(new URL(`../../${path}`, import.meta.url), "utf8")).project.name);
    expect(out).toMatch(/\d+ bands? on \d+ bus/);
    expect(out).toMatch(/flat within [\d.e-]+ dB/);
  });

  test("a warning goes to stderr with the file's name; the file is good all the same", async () => {
    const project = oneBus([bandOf("b", "level-section", { seriesR: 470 })]);
    const path = write("loose.bandwright", serializeProject({ ...project, blocks: [...project.blocks, bandOf("loose", "level-section", { seriesR: 470 })] }));
    const { code, stdout, stderr } = await bandwright("check", path);
    expect(code).toBe(0);
    expect(stderr).toBe(`${path}: warning: blocks[4]: “loose” takes no part: it hangs on no bus\n`);
    expect(stdout).toMatch(/1 band on 1 bus/);
  });

  // A handful of each sort; all of them go through the same two functions in process elsewhere.
  const SOME = ["empty", "cut in the middle", "NaN", "a NUL byte between values", "20 MB of opening brackets", "a key twice at the top", "the next version, both told", "a negative value", "a position past full boost", "two blocks with one id", "an unknown op amp", "an unknown kind", "a loop", "a wire to a block that is not there"];
  test.each(BROKEN_FILES.filter((b) => SOME.includes(b.name)))("a broken file, $name: the fault on stderr, exit 2", async ({ name, make, path, says }) => {
    const file = write(`broken, ${name.replaceAll(/\W+/g, "-")}.bandwright`, make());
    const ended = await bandwright("check", file);
    refused(ended, new RegExp(says.source.replace(/^\^/, ""), "m"));
    const lines = ended.stderr.trimEnd().split("\n");
    expect(lines).toHaveLength(1);
    expect(lines[0].startsWith(path === "" ? `${file}: ` : `${file}: ${path}: `)).toBe(true);
  });
  test("the handful is there", () => expect(BROKEN_FILES.filter((b) => SOME.includes(b.name))).toHaveLength(SOME.length));

  test("several faults: a line each", async () => {
    const path = write("several.bandwright", JSON.stringify({ format: "bandwright-project", version: 1, name: 5, supply: { kind: "split", positive: -1, negative: 15 }, blocks: [], wires: [] }));
    const ended = await bandwright("check", path);
    refused(ended, /name: must be text, got 5/);
    expect(ended.stderr.trimEnd().split("\n")).toEqual([`${path}: name: must be text, got 5`, `${path}: supply.positive: must be a number above 0, got -1`]);
  });

  test("what is no file of text is told in words", async () => {
    mkdirSync(join(folder, "a-folder"));
    const text = readFileSync(new URL(`../../${EXAMPLE}`, import.meta.url), "utf8");
    const [none, isFolder, utf16, binary] = await Promise.all([
      bandwright("check", join(folder, "missing.bandwright")),
      bandwright("check", join(folder, "a-folder")),
      bandwright("check", write("utf16.bandwright", Buffer.from(`\uFEFF${text}`, "utf16le"))),
      bandwright("check", write("binary.bandwright", new Uint8Array([0x89, 0x50, 0x4e, 0x47, 0xff, 0xfe, 0x00]))),
    ]);
    refused(none, /missing\.bandwright: there is no such file/);
    refused(isFolder, /this is a folder/);
    refused(utf16, /not UTF-8 text/);
    refused(binary, /not UTF-8 text/);
  });

  test("a byte order mark is no fault", async () => {
    const text = readFileSync(new URL(`../../${EXAMPLE}`, import.meta.url), "utf8");
    done(await bandwright("check", write("bom.bandwright", `\uFEFF${text}`)));
  });
});

describe.concurrent("respond", () => {
  test("by default 481 points from 10 Hz to 40 kHz, both ends exact, and core's own numbers", async () => {
    const columns = await responseJson(SALTMARSH);
    expect(columns).toEqual(computed());
    expect(columns.frequency).toHaveLength(481);
    expect([columns.frequency[0], columns.frequency[480]]).toEqual([10, 40e3]);
    // Evenly over the logarithm.
    for (let k = 1; k < 481; k++) expect(columns.frequency[k] / columns.frequency[k - 1]).toBeCloseTo(4000 ** (1 / 480), 12);
  });

  test("--from, --to and --points, in trade notation too", async () => {
    const columns = await responseJson(SALTMARSH, "--from", "31.5", "--to", "20k", "--points", "7");
    expect(columns).toEqual(computed({}, 31.5, 20e3, 7));
    expect([columns.frequency[0], columns.frequency[6]]).toEqual([31.5, 20e3]);
  });

  test("--set once, repeated and with several, --all for the others; the file's positions otherwise", async () => {
    const short = ["--points", "31"];
    const [first, second, third] = BANDS;
    const all = Object.fromEntries(BANDS.map((id) => [id, 0.5]));
    const [file, one, repeated, several, everything, both] = await Promise.all([
      responseJson(SALTMARSH, ...short),
      responseJson(SALTMARSH, ...short, "--set", `${first}=1`),
      responseJson(SALTMARSH, ...short, "--set", `${first}=1`, "--set", `${second}=0`),
      responseJson(SALTMARSH, ...short, "--set", `${first}=1`, `${second}=0`, `${third}=0.25`),
      responseJson(SALTMARSH, ...short, "--all", "0.5"),
      responseJson(SALTMARSH, ...short, "--set", `${second}=100 %`, "--all", "0.5"),
    ]);
    const at = (positions: Record<string, number>): Columns => computed(positions, 10, 40e3, 31);
    expect(file).toEqual(at({}));
    expect(one).toEqual(at({ [first]: 1 }));
    expect(repeated).toEqual(at({ [first]: 1, [second]: 0 }));
    expect(several).toEqual(at({ [first]: 1, [second]: 0, [third]: 0.25 }));
    expect(everything).toEqual(at(all));
    expect(both).toEqual(at({ ...all, [second]: 1 }));
    // And none of them says the same as another.
    expect(new Set([file, one, repeated, several, everything, both].map((c) => JSON.stringify(c.gain))).size).toBe(6);
  });

  test("--set on an id with = in it: the last = divides", async () => {
    const path = write("equals.bandwright", serializeProject(oneBus([bandOf("a=b", "level-section", { seriesR: 3000 })])));
    const { gain } = await responseJson(path, "--points", "2", "--set", "a=b=1");
    expect(gain[0]).toBeCloseTo(20 * Math.log10(2), 4);
  });

  test("--csv: a head and a row a point, the numbers of --json", async () => {
    const text = done(await bandwright("respond", SALTMARSH, "--points", "9", "--csv"));
    const [head, ...rows] = text.trimEnd().split("\n").map((line) => line.split(","));
    expect(head).toEqual(["frequency", "gain", "phase", "groupDelay"]);
    const wanted = computed({}, 10, 40e3, 9);
    expect(rows.map((row) => row.map(Number))).toEqual(wanted.frequency.map((f, k) => [f, wanted.gain[k], wanted.phase[k], wanted.groupDelay[k]]));
  });

  test("otherwise a table for reading, with its units", async () => {
    const lines = done(await bandwright("respond", SALTMARSH, "--points", "5")).trimEnd().split("\n");
    expect(lines).toHaveLength(6);
    expect(lines[0].trim().split(/ {2,}/)).toEqual(["Hz", "dB", "degrees", "delay µs"]);
    const wanted = computed({}, 10, 40e3, 5);
    lines.slice(1).forEach((line, k) => {
      const [f, gain, phase, delay] = line.trim().split(/\s+/).map(Number);
      expect(f / wanted.frequency[k]).toBeCloseTo(1, 4);
      expect(gain).toBeCloseTo(wanted.gain[k], 2);
      expect(phase).toBeCloseTo(wanted.phase[k], 1);
      expect(delay).toBeCloseTo(wanted.groupDelay[k] * 1e6, 1);
    });
  });

  test("--json has no NaN and no Infinity, whatever the file holds; no finite response is exit 1", async () => {
    const path = write("extreme.bandwright", serializeProject(oneBus([bandOf("b", "gyrator-section", { seriesC: 1e-300, seriesR: 1e300, gyratorC: 1e-300, gyratorR: 1e300 }, { opAmp: "TL072", slider: { position: 1 } })])));
    const { code, stdout, stderr } = await bandwright("respond", path, "--json");
    expect(stdout).not.toMatch(/NaN|Infinity|null/);
    if (code === 0) for (const gain of (JSON.parse(stdout) as Columns).gain) expect(gain).toSatisfy(Number.isFinite);
    else {
      expect(code).toBe(1);
      expect(stdout).toBe("");
      expect(stderr).toMatch(/no finite/);
    }
  });

  test("a reader that stops early, such as head, is no failure", async () => {
    const { code, stdout, stderr } = await bandwrightHead("respond", SALTMARSH, "--points", "20000", "--csv");
    expect(stdout.startsWith("frequency,gain,phase,groupDelay\n")).toBe(true);
    expect(stderr).toBe("");
    expect(code).toBe(0);
  });

  test.each<[string, string[], RegExp]>([
    ["--json and --csv together", ["--json", "--csv"], /--json.*cannot be used with.*--csv|--csv.*cannot be used with.*--json/],
    ["--from above --to", ["--from", "2k", "--to", "1k"], /--from 2k must lie below --to 1k/],
    ["--from equal to --to", ["--from", "1k", "--to", "1000"], /must lie below/],
    ["--from 0", ["--from", "0"], /--from: must be a frequency above 0/],
    ["--from negative", ["--from=-5"], /--from: must be a frequency above 0.*-5/],
    ["--to that is no number", ["--to", "high"], /--to: must be a frequency.*high/],
    ["--to without bound", ["--to", "1e999"], /--to: must be a frequency/],
    ["one point", ["--points", "1"], /--points: must be a whole number from 2/],
    ["half a point", ["--points", "10.5"], /--points: must be a whole number/],
    ["points in words", ["--points", "many"], /--points: must be a whole number.*many/],
    ["points without end", ["--points", "1e12"], /--points/],
    ["--set without =", ["--set", "b1k"], /--set: must be ID=POS, such as b1k=0\.75/],
    ["--set without id", ["--set", "=0.5"], /--set: must be ID=POS/],
    ["--set on no band", ["--set", "ghost=0.5"], /there is no band “ghost” on a bus of this board: its bands are /],
    ["--set on a name of the prototype", ["--set", "constructor=0.5"], /there is no band “constructor”/],
    ["--set past the end", ["--set", `${BANDS[0]}=1.5`], /from 0 \(full cut\) to 1 \(full boost\), got “1\.5”/],
    ["--set to nothing", ["--set", `${BANDS[0]}=`], /from 0 \(full cut\) to 1/],
    ["--all past the end", ["--all", "2"], /--all: the position must be from 0/],
    ["--all below", ["--all=-0.1"], /--all: the position must be from 0/],
    ["an unknown option", ["--loud"], /unknown option '--loud'/],
    ["a second file", ["another.bandwright"], /too many arguments/],
  ])("%s is refused", async (_name, args, says) => refused(await bandwright("respond", SALTMARSH, ...args), says));
});

describe.concurrent("bands", () => {
  test.each(DEMOS)("%s --json: the figures of core, null where one does not apply", async (path) => {
    const { bands } = JSON.parse(done(await bandwright("bands", path, "--json"))) as { bands: BandFigures[] };
    const wanted = bandFigures(boardOf(path));
    expect(bands).toEqual(JSON.parse(JSON.stringify(wanted)));
    expect(Object.keys(bands[0])).toEqual(expect.arrayContaining(["id", "label", "kind", "inductance", "resonance", "legQ", "isolatedBoost", "boost", "cut", "interactionLoss"]));
    expect(Object.keys(bands[0].boost)).toEqual(expect.arrayContaining(["peak", "frequency", "q", "lower", "upper"]));
  });

  test("a table otherwise: a row a band, peak and centre among its figures", async () => {
    const path = write("ten.bandwright", serializeProject(tenBandBoard()));
    const lines = done(await bandwright("bands", path)).trimEnd().split("\n");
    expect(lines).toHaveLength(11);
    const row = lines.find((line) => line.startsWith("b1000"))!;
    expect(row).toMatch(/\b17\.36\b/);
    expect(row).toMatch(/\b10\.43\b.*\b962 Hz\b/);
  });

  test("are the same whatever the sliders say", async () => {
    const [asFiled, moved] = await Promise.all([bandwright("bands", SALTMARSH, "--json"), bandwright("bands", SALTMARSH, "--json", "--all", "0.9")]);
    expect(done(moved)).toBe(done(asFiled));
  });

  test("of a board without bands are none", async () => {
    const path = write("none.bandwright", serializeProject(oneBus([])));
    expect(JSON.parse(done(await bandwright("bands", path, "--json")))).toEqual({ bands: [] });
  });
});

describe.concurrent("help and what is not understood", () => {
  test("the program's help names every command, and each has help with an example that works", async () => {
    const help = done(await bandwright("--help"));
    expect(help).toMatch(/Exit codes: 0 done, 1 failed, 2 bad input/);
    const commands = [...help.slice(help.indexOf("Commands:")).matchAll(/^ {2}(\w+)(?: \[options\])? <FILE>/gm)].map((m) => m[1]);
    expect(commands).toEqual(expect.arrayContaining(["check", "respond", "bands"]));
    await Promise.all(
      commands.map(async (command) => {
        const own = done(await bandwright(command, "--help"));
        expect(own).toContain(`Usage: bandwright ${command} `);
        const example = /Example:\n {2}bandwright (.+)/.exec(own)?.[1];
        expect(example?.startsWith(`${command} channel.bandwright`)).toBe(true);
        // What works on a drawer is tried on one in choose.test.ts.
        if (own.includes("--drawer")) return;
        const ended = await bandwright(...example!.replace("channel.bandwright", EXAMPLE).split(" "));
        expect(ended).toMatchObject({ code: 0, stderr: "" });
        expect(ended.stdout).not.toBe("");
      }),
    );
  });

  test("--version gives the package's", async () => {
    const { version } = JSON.parse(readFileSync(new URL("../../package.json", import.meta.url), "utf8")) as { version: string };
    expect(done(await bandwright("--version"))).toBe(`${version}\n`);
  });

  test.each<[string, string[], RegExp]>([
    ["an unknown command", ["draw", EXAMPLE], /unknown command 'draw'/],
    ["no file", ["check"], /missing required argument 'FILE'/],
    ["an unknown option of the program", ["--loud"], /unknown option '--loud'/],
    ["--set that swallows the file", ["respond", "--set", "b1k=1", EXAMPLE], /missing required argument|must be ID=POS/],
  ])("%s: exit 2, a message on stderr alone", async (_name, args, says) => refused(await bandwright(...args), says));

  test("no command at all shows the help on stderr and is bad input", async () => {
    const { code, stdout, stderr } = await bandwright();
    expect({ code, stdout }).toEqual({ code: 2, stdout: "" });
    expect(stderr).toMatch(/Usage: bandwright/);
  });
});
