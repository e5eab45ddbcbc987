/** Choosing parts on the command line, on a drawer with the starter's parts in it. */
import { copyFileSync, existsSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, test, vi } from "vitest";
import type { Bill } from "../../core/drawer/bill.ts";
import { openDrawer } from "../../app/store/drawer-store.ts";
import { restoreProject } from "../../core/model/restore.ts";
import { bandwright, type Ended } from "../fixtures/command-line.ts";

vi.setConfig({ testTimeout: 60_000, hookTimeout: 60_000 });

const DEMOS = readdirSync(new URL("../../assets/demo", import.meta.url)).filter((name) => name.endsWith(".bandwright"));
const VOICE = "assets/demo/saltmarsh-voice-channel.bandwright";

let folder = "";
let drawer = "";
/** The voice channel, filled. */
let filled = "";
beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), "bandwright-choose-"));
  drawer = join(folder, "drawer.sqlite");
  filled = join(folder, "filled.bandwright");
  done(await bandwright("stock", "import", "assets/drawer/starter.csv", "--drawer", drawer));
  // The starter drawer holds sliders for one small board; some of these tests build large ones, and several.
  done(await bandwright("stock", "move", "P-10K-SL45", "bought", "40", "--drawer", drawer));
  done(await bandwright("fill", VOICE, "-o", filled, "--drawer", drawer));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function done(ended: Ended): string {
  expect(ended.stderr).not.toMatch(/unexpectedly/);
  expect(ended.code).toBe(0);
  return ended.stdout;
}

function refused(ended: Ended, code: number, says: RegExp): void {
  expect(ended.stderr).toMatch(says);
  expect(ended.stderr).not.toMatch(/unexpectedly/);
  expect(ended.stdout).toBe("");
  expect(ended.code).toBe(code);
}

const projectAt = (path: string) => restoreProject(readFileSync(path, "utf8")).project;
const partAt = (path: string, block: string, role: string) => projectAt(path).blocks.find((b) => b.id === block)!.parts![role];

interface FillJson {
  readonly error: number;
  readonly placed: readonly { readonly role: string; readonly lines: readonly string[] }[];
  readonly unplaced: readonly unknown[];
}

describe.concurrent("fill", () => {
  test.each(DEMOS)("%s is filled from the starter drawer, close to its design", async (name) => {
    const out = join(folder, `filled-${name}`);
    const result = JSON.parse(done(await bandwright("fill", `assets/demo/${name}`, "-o", out, "--drawer", drawer, "--json"))) as FillJson;
    expect(result.unplaced).toEqual([]);
    expect(result.error).toBeLessThan(0.25);
    expect(result.placed.length).toBeGreaterThan(40);
    for (const block of projectAt(out).blocks) for (const part of Object.values(block.parts ?? {})) expect(part.stock).toBeDefined();
    // A filled board is complete for its bill.
    const bill = JSON.parse(done(await bandwright("build", out, "--units", "1", "--drawer", drawer, "--json"))) as Bill;
    expect(bill.isReady).toBe(true);
    expect(bill.unassigned).toEqual([]);
  });

  test("says where nothing fits at all, and writes nothing", async () => {
    const [empty, out] = [join(folder, "empty.sqlite"), join(folder, "unfilled.bandwright")];
    done(await bandwright("stock", "list", "--drawer", empty));
    refused(await bandwright("fill", VOICE, "-o", out, "--drawer", empty), 1, /in\.sourceR, .* keep their values without a line: the drawer has no resistor[^]*nothing of the drawer goes into this board\. Nothing was written/);
    expect(existsSync(out)).toBe(false);
  });

  test("leaves what it cannot place and says so; a ceiling that cannot be kept writes nothing", async () => {
    const out = join(folder, "ten-of-them.bandwright");
    const ended = await bandwright("fill", VOICE, "-o", out, "--units", "20", "--drawer", drawer);
    expect(ended.code).toBe(0);
    expect(ended.stderr).toMatch(/\.slider.* without a line: /);
    const none = join(folder, "none.bandwright");
    refused(await bandwright("fill", VOICE, "-o", none, "--ceiling", "2 EUR", "--drawer", drawer), 1, /more than the ceiling\. Nothing was written/);
    expect(existsSync(none)).toBe(false);
  });
});

describe.concurrent("swap", () => {
  test("ranks, shows the voltages, and writes the choice", async () => {
    const list = done(await bandwright("swap", VOICE, "--role", "b1k.seriesC", "--drawer", drawer));
    expect(list).toMatch(/1 kHz: series C \(b1k\.seriesC\), now 180 nF/);
    expect(list).toMatch(/V steady and up to \d+\.\d V of signal/);
    const out = join(folder, "swapped.bandwright");
    const result = JSON.parse(done(await bandwright("swap", VOICE, "--role", "b1k.seriesC", "--pairs", "--take", "2", "-o", out, "--drawer", drawer, "--json"))) as { readonly candidates: readonly { readonly lines: readonly string[]; readonly value: number; readonly worst: number; readonly problems: readonly unknown[] }[] };
    const [, second] = result.candidates;
    expect(result.candidates.map((c) => c.worst)).toEqual(result.candidates.map((c) => c.worst).toSorted((a, b) => a - b));
    expect(partAt(out, "b1k", "seriesC")).toMatchObject({ value: second.value, stock: second.lines[0] });
  });

  test("may write over the input where -o names it", async () => {
    const own = join(folder, "own.bandwright");
    copyFileSync(VOICE, own);
    done(await bandwright("swap", own, "--role", "b1k.gyratorR", "--take", "1", "-o", own, "--drawer", drawer));
    expect(partAt(own, "b1k", "gyratorR").stock).toBeDefined();
  });

  test("does not take what is barred", async () => {
    const own = join(folder, "barred.sqlite");
    copyFileSync(drawer, own);
    done(await bandwright("stock", "add", "P-LOG", "--kind", "potentiometer", "--value", "10k", "--technology", "carbon, log", "--quantity", "5", "--drawer", own));
    const list = done(await bandwright("swap", VOICE, "--role", "b1k.slider", "--drawer", own));
    const number = /^P-LOG +(\d+)/m.exec(list)![1];
    expect(list.split("\n").filter((row) => row.startsWith("P-")).at(-1)).toMatch(/^P-LOG/);
    expect(list).toContain(`no. ${number}, P-LOG: does not do: its taper is logarithmic, but the slider's law is linear`);
    const out = join(folder, "barred.bandwright");
    refused(await bandwright("swap", VOICE, "--role", "b1k.slider", "--take", number, "-o", out, "--drawer", own), 2, /--take: number \d+, P-LOG, does not do: its taper is logarithmic/);
    expect(existsSync(out)).toBe(false);
  });

  test("says why nothing fits, where nothing does", async () => {
    const why = async (...args: string[]) => (await bandwright("swap", ...args, "--drawer", drawer)).stderr;
    expect(await why(VOICE, "--role", "b1k.seriesC", "--units", "5000")).toMatch(/^nothing in the drawer fits: \d+ too few of C-180N-PET: \d+ are free$/m);
    expect(await why("assets/demo/curlew-pedal.bandwright", "--role", "b100.seriesC", "--window", "1%")).toMatch(/^nothing in the drawer fits: no value within 1 % \(the nearest is C-1U-\w+, 16\.7 % below\)$/m);
  });

  test("refuses what makes no sense", async () => {
    const swap = (...args: string[]) => bandwright("swap", VOICE, "--drawer", drawer, ...args);
    refused(await swap("--role", "b1k.nothing"), 2, /has no part “b1k\.nothing”: it has .*b1k\.seriesC/);
    refused(await swap("--role", "b1k.seriesC", "--take", "1"), 2, /--take and -o go together/);
    refused(await swap("--role", "b1k.seriesC", "--take", "999", "-o", join(folder, "x.bandwright")), 2, /there is no number 999/);
    refused(await swap("--role", "b1k.seriesC", "--units", "0"), 2, /--units: must be a whole number/);
    refused(await bandwright("swap", VOICE, "--role", "b1k.seriesC", "--drawer", join(folder, "nowhere.sqlite")), 2, /there is no drawer at/);
    refused(await swap("--role", "b1k.seriesC", "--take", "1", "-o", join(folder, "no", "such", "folder.bandwright")), 1, /could not be written/);
    expect(existsSync(join(folder, "nowhere.sqlite"))).toBe(false);
  });
});

describe.concurrent("build", () => {
  test("holds the pieces, counts held ones for the same build, and books them as used", async () => {
    const own = join(folder, "build.sqlite");
    copyFileSync(drawer, own);
    const build = async (...args: string[]) => JSON.parse(done(await bandwright("build", filled, "--drawer", own, "--json", ...args))) as { readonly rows: readonly { readonly line: string; readonly total: number; readonly available: number; readonly short: number }[] };
    const before = await build("--units", "2");
    await build("--units", "2", "--reserve");
    const again = await build("--units", "2");
    expect(again.rows.map((r) => r.available)).toEqual(before.rows.map((r) => r.available));
    await build("--units", "2", "--use");
    const after = await build("--units", "1");
    for (const [i, row] of after.rows.entries()) expect(row.available).toBe(before.rows[i].available - before.rows[i].total);
    refused(await bandwright("build", VOICE, "--units", "1", "--reserve", "--drawer", own), 1, /fill it first/);
    refused(await bandwright("build", filled, "--units", "1", "--reserve", "--use", "--drawer", own), 2, /one at a time/);
    done(await bandwright("build", filled, "--units", "1", "--reserve", "--drawer", own));
    expect((await bandwright("build", filled, "--release", "--drawer", own)).stderr).toBe("nothing is held for “Saltmarsh voice channel” any more\n");
    refused(await bandwright("build", filled, "--release", "--drawer", own), 1, /^nothing is held for “Saltmarsh voice channel”$/m);
  });

  test("uses what nobody held in one step, which one undo takes back", async () => {
    const own = join(folder, "use.sqlite");
    copyFileSync(drawer, own);
    const look = async () => {
      const store = await openDrawer({ path: own, now: () => new Date(0) });
      const seen = { steps: store.steps(1000).length, lines: store.allLines(), builds: store.builds() };
      store.close();
      return seen;
    };
    const before = await look();
    done(await bandwright("build", filled, "--units", "2", "--use", "--drawer", own));
    const used = await look();
    expect(used.steps).toBe(before.steps + 1);
    expect(used.builds).toMatchObject([{ units: 0, unitsUsed: 2, state: "used" }]);
    expect(done(await bandwright("stock", "undo", "--drawer", own))).toBe("Undo: Use for Saltmarsh voice channel\n");
    expect(await look()).toEqual({ ...before, steps: before.steps + 2 });
  });

  test.each(["--reserve", "--use"])("%s of too many shows the shopping list and who holds the rest, books nothing, and says how to go on", async (booking) => {
    const own = join(folder, `short${booking}.sqlite`);
    copyFileSync(drawer, own);
    const [line] = projectAt(filled).blocks.flatMap((b) => b.parts?.["seriesC"]?.stock ?? []);
    done(await bandwright("stock", "move", line, "reserved", "2", "--for", "Ferry pedal", "--drawer", own));
    const asked = await bandwright("build", filled, "--units", "60", "--drawer", own);
    const ended = await bandwright("build", filled, "--units", "60", booking, "--drawer", own);
    expect(ended.code).toBe(1);
    expect(ended.stdout).toBe(asked.stdout);
    expect(ended.stdout).toMatch(/To buy from Harbour Components[^]*order code[^]*cheaper/);
    expect(ended.stderr).toMatch(/^too few pieces, so nothing was booked: .*\nThe shopping list says what to buy\..*“bandwright stock move LINE bought COUNT”.*There are pieces for \d units: --units \d\.$/m);
    expect(ended.stderr).toContain(`of ${line} (held by Ferry pedal: 2)`);
    const json = await bandwright("build", filled, "--units", "60", booking, "--drawer", own, "--json");
    expect([json.code, (JSON.parse(json.stdout) as { booked: unknown }).booked, (JSON.parse(json.stdout) as Bill).shopping.length]).toEqual([1, null, 2]);
    const store = await openDrawer({ path: own, now: () => new Date(0) });
    expect([store.builds(), store.steps(1)[0].label]).toEqual([[], `Reserved: ${line}`]);
    store.close();
  });

  test("shops by supplier", async () => {
    const out = done(await bandwright("build", filled, "--units", "12", "--drawer", drawer));
    expect(out).toMatch(/To buy from Harbour Components/);
    expect(out).toMatch(/12 units: \d+\.\d\d EUR, \d+\.\d\d EUR a unit/);
  });
});

describe.concurrent("match", () => {
  test("says where there is nothing measured", async () => {
    const out = join(folder, "matched.bandwright");
    refused(await bandwright("match", filled, "-o", out, "--drawer", drawer), 1, /have been measured\. Nothing was written/);
    expect(existsSync(out)).toBe(false);
  });

  test("writes down which piece goes where, and how much better than blind picking that is", async () => {
    const own = join(folder, "measured.sqlite");
    copyFileSync(drawer, own);
    const capacitors = projectAt(filled).blocks.flatMap((b) => ["seriesC", "gyratorC"].flatMap((role) => b.parts?.[role] ?? [])).filter((p) => p.second === undefined);
    const store = await openDrawer({ path: own, now: () => new Date(0) });
    store.putPieces([...new Set(capacitors.map((p) => p.stock!))].flatMap((line) => [-0.04, -0.02, 0.01, 0.03, 0.05].map((off, i) => ({ id: null, line, mark: `${line} ${i}`, value: capacitors.find((p) => p.stock === line)!.value * (1 + off), frequency: 1000 }))));
    store.close();
    const out = join(folder, "dealt.bandwright");
    const result = JSON.parse(done(await bandwright("match", filled, "-o", out, "--drawer", own, "--json"))) as { readonly error: number; readonly random: { readonly median: number; readonly best: number }; readonly matched: readonly { readonly role: string; readonly piece: number; readonly measured: number }[] };
    expect(result.matched).toHaveLength(capacitors.length);
    expect(result.error).toBeLessThan(result.random.best);
    for (const { role, piece, measured } of result.matched) {
      const [block, name] = role.split(".");
      expect(partAt(out, block, name)).toMatchObject({ piece, measured });
    }
  });
});

test("a board without a finite response is filled with nothing, in words", async () => {
  const [lost, out] = [join(folder, "lost.bandwright"), join(folder, "never.bandwright")];
  writeFileSync(lost, readFileSync(VOICE, "utf8").replace('"value": 1.8e-7', '"value": 1.8e+300'));
  expect(partAt(lost, "b1k", "seriesC").value).toBe(1.8e300);
  for (const args of [["fill", lost, "-o", out], ["fill", lost, "-o", out, "--json"], ["swap", lost, "--role", "b1k.seriesR"]]) refused(await bandwright(...args, "--drawer", drawer), 1, /there is no finite response to compare with: some value of the board is out of any practical range/);
  expect(existsSync(out)).toBe(false);
});

describe.concurrent.each(["fill", "match", "swap"])("-o of %s", (name) => {
  const args = name === "swap" ? ["--role", "b1k.gyratorR", "--take", "1"] : [];
  const write = async (out: string, own = drawer): Promise<Ended> => bandwright(name, filled, ...args, "-o", out, "--drawer", own);

  test("leaves any file alone that is no project, and says so before the work", async () => {
    for (const [file, bytes] of [["parts.csv", "id,value\n1,2\n"], ["picture.png", Buffer.from([0x89, 0x50, 0x4e, 0x47, 0xff, 0])], ["other.json", "{ \"format\": \"recipe\" }"], ["own.sqlite", readFileSync(drawer)]] as const) {
      const out = join(folder, `${name}-${file}`);
      writeFileSync(out, bytes);
      refused(await write(out, file === "own.sqlite" ? out : drawer), 2, /-o: .* is there already and is no project, so nothing was written over it/);
      expect(readFileSync(out).equals(Buffer.from(bytes))).toBe(true);
    }
    refused(await write(folder), 2, /-o: .* is a folder: name a file/);
  });

  test("replaces an earlier project, an empty file and the input itself, as --help says", async () => {
    const own = join(folder, `${name}-out.sqlite`);
    copyFileSync(drawer, own);
    const lines = [...new Set(projectAt(filled).blocks.flatMap((b) => b.parts?.["seriesR"]?.stock ?? []))];
    const store = await openDrawer({ path: own, now: () => new Date(0) });
    store.putPieces(lines.map((line) => ({ id: null, line, mark: "1", value: store.find(line)!.value! * 1.01, frequency: null })));
    store.close();
    const [earlier, empty, input] = ["earlier", "empty", "input"].map((one) => join(folder, `${name}-${one}.bandwright`));
    copyFileSync("assets/demo/curlew-pedal.bandwright", earlier);
    writeFileSync(empty, "");
    copyFileSync(filled, input);
    for (const out of [earlier, empty]) done(await write(out, own));
    done(await bandwright(name, input, ...args, "-o", input, "--drawer", own));
    expect(projectAt(earlier).name).toBe("Saltmarsh voice channel");
    expect([earlier, empty].map((one) => readFileSync(one, "utf8"))).toEqual(Array(2).fill(readFileSync(input, "utf8")));
    expect((await bandwright(name, "--help")).stdout.replaceAll(/\s+/g, " ")).toContain("A project that is there, FILE itself too, is replaced; any other file is left alone");
  });
});

test.each(["swap", "fill", "match", "build"])("%s explains itself with an example that works", async (name) => {
  const own = join(folder, `${name}-example.sqlite`);
  copyFileSync(drawer, own);
  if (name === "match") done(await bandwright("stock", "measure", partAt(filled, "b1k", "seriesR").stock!, "468", "473", "471", "469", "475", "470", "466", "--drawer", own));
  const help = done(await bandwright(name, "--help"));
  const example = /Example:\n {2}bandwright (.+)/.exec(help)![1];
  const args = example.replace("channel.bandwright", filled).replace(/-o (\S+)/, `-o ${join(folder, `${name}-example.bandwright`)}`).split(" ");
  expect(args[0]).toBe(name);
  expect(done(await bandwright(...args, "--drawer", own))).not.toBe("");
});
