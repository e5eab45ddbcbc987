import { readFile } from "node:fs/promises";
import type { Browser, Locator } from "playwright-core";
import { afterAll, afterEach, beforeAll, describe, expect, test } from "vitest";
import { lossAccount } from "../../core/analysis/interaction.ts";
import { lawResults } from "../../core/analysis/laws.ts";
import { polesAndZeros } from "../../core/analysis/poles.ts";
import { loopMargins, smallestMargin } from "../../core/analysis/stability.ts";
import { setPartValue } from "../../core/model/edit.ts";
import { BLOCKS } from "../../core/blocks/index.ts";
import { newProject } from "../../core/model/new-project.ts";
import { applyPatch } from "../../core/model/patch.ts";
import type { Project } from "../../core/model/project.ts";
import { restoreProject } from "../../core/model/restore.ts";
import { serializeProject } from "../../core/model/serialize.ts";
import { resolveBoard } from "../../core/net/board.ts";
import { formatDb, formatFigure } from "../../core/units.ts";
import { OSCILLATING } from "../fixtures/oscillating.ts";
import { launchBrowser } from "../helpers/browser.ts";
import { DEMO, Session } from "./session.ts";

let browser: Browser;
let session: Session;
let demo: Project;

beforeAll(async () => {
  browser = await launchBrowser();
  demo = restoreProject(await readFile(DEMO, "utf8")).project;
});
afterAll(() => browser.close());
afterEach(() => session.end());

const area = (): Locator => session.page.getByRole("main", { name: "Equations" });
const list = (): Locator => session.page.getByRole("navigation", { name: "Pages of equations" });
const law = (symbol: string): Promise<string> => area().locator(`[data-law=${symbol}]`).getByTestId("law-result").innerText();
const stability = (): Locator => session.page.getByTestId("stability");

/** What the laws of a band come to, from the core alone. */
function laws(project: Project, id: string): Readonly<Record<string, number>> {
  const item = resolveBoard(project).chain.find(({ bands }) => bands.some((b) => b.id === id))!;
  return lawResults(item.bands.find((b) => b.id === id)!, item.block);
}

async function showBand(name: string): Promise<void> {
  await list().getByRole("button", { name: new RegExp(`^${name}`) }).click();
}

async function clipboard(): Promise<string> {
  await session.page.context().grantPermissions(["clipboard-read", "clipboard-write"]);
  return session.page.evaluate(() => navigator.clipboard.readText());
}

describe("the equations of a block", () => {
  test("are reached by keyboard and say what the core computes", async () => {
    session = await Session.start(browser, { file: DEMO });
    await session.sheet.pick("b1k");
    await session.keyboard.press("Alt+Shift+E");
    await area().waitFor();
    const results = laws(demo, "b1k");
    expect(await law("L")).toBe(formatFigure(results.L, "inductance"));
    expect(await law("f0")).toBe(formatFigure(results.f0, "frequency"));
    expect(await law("Q")).toBe(formatFigure(results.Q, "plain"));
    expect(await area().locator("[data-law=f0] .katex").count()).toBeGreaterThan(0);
    const account = lossAccount(resolveBoard(demo), "b1k");
    const total = `${formatDb(account.isolatedBoost, 2)} − ${account.whole.toFixed(2)} dB = ${formatDb(account.peak, 2)}`;
    await expect.poll(() => area().getByTestId("account-total").innerText()).toContain(total);
    const bars = await area().locator(".account-row").allInnerTexts();
    expect(bars.map((text) => text.split("\n").at(-1))).toEqual([...account.shares.map((s) => s.loss), account.own].map((loss) => `${loss.toFixed(2)} dB`));
    // The tabs themselves: one stop, arrows walk.
    await session.page.getByRole("tab", { name: "Equations" }).focus();
    await session.keyboard.press("Home");
    expect(await session.page.getByRole("tab", { name: "Board" }).getAttribute("aria-selected")).toBe("true");
    expect(await area().count()).toBe(0);
  });

  test("follow a value that is edited beside them", async () => {
    session = await Session.start(browser, { file: DEMO });
    await session.keyboard.press("Alt+Shift+E");
    await showBand("1 kHz");
    const before = await law("f0");
    await area().getByTestId("account-total").waitFor();
    const total = await area().getByTestId("account-total").innerText();
    await session.panel.set("series C", "100n");
    const edited = applyPatch(demo, setPartValue(demo, "b1k", "seriesC", 100e-9));
    expect(await law("f0")).toBe(formatFigure(laws(edited, "b1k").f0, "frequency"));
    expect(await law("f0")).not.toBe(before);
    await expect.poll(() => area().getByTestId("account-total").innerText()).not.toBe(total);
    const account = lossAccount(resolveBoard(edited), "b1k");
    await expect.poll(() => area().getByTestId("account-total").innerText()).toContain(formatDb(account.peak, 2));
    expect(await area().getByRole("region", { name: "In circuit" }).getAttribute("aria-busy")).toBe("false");
  });

  test("take the frequency that is typed, and the cursor's by a key on the sheet", async () => {
    session = await Session.start(browser, { file: DEMO });
    await session.page.locator("[data-response]").focus();
    await session.keyboard.press("ArrowRight", "e");
    const field = session.page.getByLabel("Frequency of the numbers");
    await field.waitFor();
    const atCursor = await field.inputValue();
    expect(atCursor).toMatch(/^1\.\d+ kHz$/);
    await showBand("Octave bus");
    expect(await field.inputValue()).toBe(atCursor);
    const first = await area().getByTestId("transfer-gain").innerText();
    await field.fill("4k");
    await session.keyboard.press("Enter");
    expect(await area().getByRole("heading", { name: "At 4 kHz" }).count()).toBe(1);
    expect(await area().getByTestId("transfer-gain").innerText()).not.toBe(first);
    await field.fill("0");
    await session.keyboard.press("Enter");
    expect(await session.page.getByRole("alert").innerText()).toContain("must be from");
    await session.keyboard.press("Escape");
    await area().getByRole("button", { name: "Back to 1 kHz" }).click();
    expect(await field.inputValue()).toBe("1 kHz");
    await area().getByRole("button", { name: "Unfold all" }).click();
    expect(await area().locator("[data-node][open]").count()).toBe(3);
  });

  test("are copied as LaTeX and as text, of the block and of the board", async () => {
    session = await Session.start(browser, { file: DEMO });
    await session.keyboard.press("Alt+Shift+E");
    await showBand("1 kHz");
    const block = area().getByRole("group", { name: /^This block/ });
    await block.getByRole("button", { name: "Copy as LaTeX" }).click();
    await expect.poll(() => session.page.getByRole("status").innerText()).toContain("as LaTeX");
    const tex = await clipboard();
    expect(tex).toContain("\\[ L = R_{\\text{series}}\\cdot R_{\\text{gyrator}}\\cdot C_{\\text{gyrator}} = 470\\,\\mathrm{\\Omega}");
    expect(tex).not.toContain("Octave bus (eq)");
    await area().getByRole("group", { name: /^Whole board/ }).getByRole("button", { name: "Copy as text" }).click();
    await expect.poll(() => session.page.getByRole("status").innerText()).toContain("the whole board as text");
    const text = await clipboard();
    for (const part of ["Saltmarsh voice channel", "Octave bus (eq)", "63 Hz (b63)", "8 kHz (b8k)", "L = seriesR·gyratorR·gyratorC = 470 Ω·91 kΩ·3.3 nF = 141 mH"]) expect(text).toContain(part);
  });

  test("a board without bands and one with wiring faults are told about, not left blank", async () => {
    const plain = serializeProject({ ...newProject(), name: "Plain" });
    const unwired = serializeProject({ ...newProject(), name: "Unwired", wires: [] });
    session = await Session.start(browser, { projects: { "Plain.bandwright": plain, "Unwired.bandwright": unwired } });
    for (const [name, words] of [["Plain", "Boost/cut stage"], ["Unwired", "no response to show"]] as const) {
      await session.keyboard.press("Control+o");
      await session.page.getByRole("option", { name }).dblclick();
      await expect.poll(() => session.page.title()).toContain(name);
      await session.keyboard.press("Alt+Shift+E");
      await expect.poll(async () => (await area().innerText()).toLowerCase()).toContain(words.toLowerCase());
      if (name === "Unwired") {
        // On the board the faults stand over nothing that is drawn.
        await session.keyboard.press("Alt+Shift+B");
        const card = (await session.page.getByRole("alert", { name: "Wiring faults" }).boundingBox())!;
        for (const block of await session.page.locator("[data-block]").all()) expect((await block.boundingBox())!.y).toBeGreaterThan(card.y + card.height);
      }
    }
    // Faulty wiring leaves no loop to judge: nothing stands there as if it were being computed.
    expect(await stability().count()).toBe(0);
  });
});

describe("poles, zeros and loops", () => {
  test("the table lists the core's, sorts, and selects blocks; the status line names the smallest margin", async () => {
    session = await Session.start(browser, { file: DEMO });
    const board = resolveBoard(demo);
    const least = smallestMargin(loopMargins(board))!;
    await expect.poll(() => stability().innerText()).toBe(`smallest phase margin ${least.phaseMargin.toFixed(0)}° (4 kHz)`);
    await session.keyboard.command("poles");
    const table = area().getByRole("table", { name: "Poles and zeros" });
    await table.waitFor();
    const { poles, zeros, reproducedWithin } = polesAndZeros(board);
    const frequencies = async (kind: string): Promise<string[]> => table.locator(`[data-root-row=${kind}] td:nth-child(2)`).allInnerTexts();
    const wanted = (roots: readonly { readonly re: number; readonly im: number }[]): string[] =>
      roots.filter(({ im }) => im >= 0).map(({ re, im }) => (re === 0 && im === 0 ? "0 Hz" : formatFigure(Math.hypot(re, im) / (2 * Math.PI), "frequency")));
    expect(await frequencies("pole")).toEqual(wanted(poles));
    expect(await frequencies("zero")).toEqual(wanted(zeros));
    // Rounding differs a little from engine to engine: the power of ten is what it tells.
    expect(reproducedWithin).toBeLessThan(1e-9);
    expect(await area().getByTestId("reproduced").innerText()).toMatch(/within \d·10⁻¹[⁰¹²³] dB/);
    await table.getByRole("button", { name: "frequency" }).click();
    expect(await frequencies("pole")).toEqual(wanted(poles).toReversed());
    const loops = area().getByRole("table", { name: "Loops" });
    expect(await loops.locator("[data-loop]").count()).toBe(loopMargins(board).length);
    expect(await loops.locator("[data-loop]").first().getAttribute("data-loop")).toBe(least.block);
    await loops.getByRole("button", { name: "2 kHz" }).click();
    expect(await session.page.getByRole("complementary", { name: "Panel" }).innerText()).toContain("b2k");
    expect(await area().locator(".plane-mark.is-selected").count()).toBe(poles.filter((p) => p.block === "b2k" && p.im >= 0).length);
  });

  test("the picture is walked with the arrow keys, and a root tells what it is", async () => {
    session = await Session.start(browser, { file: DEMO });
    await session.keyboard.command("poles");
    const marks = area().locator(".plane-mark");
    await marks.first().waitFor();
    await area().locator(".plane-mark[tabindex='0']").focus();
    await session.keyboard.press("Home", "ArrowRight");
    const first = await session.page.evaluate(() => document.activeElement?.getAttribute("aria-label"));
    expect(first).toBe("pole at 0.159 Hz, real, ζ 1.000, Input");
    expect(await area().locator(".plane-tip").innerText()).toBe(first);
    await session.keyboard.press("Enter");
    expect(await session.page.getByRole("complementary", { name: "Panel" }).innerText()).toContain("source R");
  });

  test("follow the sliders, and are never shown as current while they are of another position", async () => {
    session = await Session.start(browser, { file: DEMO });
    await session.keyboard.command("poles");
    const reproduced = area().getByRole("article");
    await expect.poll(() => reproduced.getAttribute("aria-busy")).toBe("false");
    const table = area().getByRole("table", { name: "Poles and zeros" });
    const before = await table.innerText();
    await session.keyboard.command("All sliders to full boost");
    await expect.poll(async () => (await reproduced.getAttribute("aria-busy")) === "false" && (await table.innerText()) !== before).toBe(true);
    const boosted: Project = { ...demo, blocks: demo.blocks.map((b) => (b.slider ? { ...b, slider: { ...b.slider, position: 1 } } : b)) };
    const { poles } = polesAndZeros(resolveBoard(boosted));
    expect(await table.locator("[data-root-row=pole] td:nth-child(2)").allInnerTexts()).toEqual(poles.filter((p) => p.im >= 0).map((p) => formatFigure(Math.hypot(p.re, p.im) / (2 * Math.PI), "frequency")));
  });
});

describe("an unstable board", () => {
  test("says so wherever there are figures, names the loop, and recovers", async () => {
    const project = { ...OSCILLATING.slow, blocks: OSCILLATING.slow.blocks.map((b) => (b.id === "hi" ? { ...b, label: "Treble" } : b)) };
    const [pole] = polesAndZeros(resolveBoard(project)).unstable;
    // The only stage, and without a name of its own: it goes by its kind.
    const name = BLOCKS[project.blocks.find((b) => b.id === pole.block)!.kind].label;
    expect(name).toBe("Boost/cut stage");
    session = await Session.start(browser, { projects: { "Howling.bandwright": serializeProject(project) } });
    await session.keyboard.press("Control+o");
    await session.page.getByRole("option", { name: "Howling" }).dblclick();
    await expect.poll(() => stability().innerText()).toBe(`unstable: the loop of “${name}”`);
    const banner = session.page.getByRole("main", { name: "Sheet" }).getByRole("alert");
    expect(await banner.innerText()).toContain("no figure here means anything");
    // The banner lies over nothing: the response, its labels half a line higher included, begins below it.
    const place = async (locator: Locator): Promise<{ top: number; bottom: number }> => {
      const box = (await locator.boundingBox())!;
      return { top: box.y, bottom: box.y + box.height };
    };
    const response = session.page.locator("[data-response]");
    await expect.poll(async () => (await place(response)).top).toBeGreaterThan((await place(banner)).bottom + 8);
    const [unstable, input] = [await place(response), await place(session.page.locator("[data-block=in]"))];
    // Nor does it push anything aside that hands may hold.
    const settled = async (): Promise<void> => {
      expect((await place(response)).bottom).toBe(unstable.bottom);
      expect(await place(session.page.locator("[data-block=in]"))).toEqual(input);
    };
    expect(await session.sheet.knob("hi").getAttribute("aria-valuetext")).toBe("unstable, 100 % of travel");
    const struck = (locator: Locator): Promise<string> => locator.evaluate((element) => getComputedStyle(element).textDecorationLine);
    expect(await struck(session.page.getByTestId("flatness"))).toBe("line-through");
    await session.sheet.pick("hi");
    expect(await session.page.getByRole("complementary", { name: "Panel" }).innerText()).toContain("the struck figures mean nothing");
    expect(await struck(session.page.locator("[data-figure=plateau] td").first())).toBe("line-through");
    await stability().click();
    await area().getByRole("table", { name: "Poles and zeros" }).waitFor();
    expect(await area().getByRole("alert").innerText()).toContain("Unstable");
    expect(await area().locator("tr.is-unstable").innerText()).toContain("unstable");
    await session.keyboard.command("Centre all sliders");
    // At peace as it stands, but the figures at full boost are of a board that oscillates.
    await expect.poll(() => stability().innerText()).toBe("unstable with “Treble” at full boost");
    expect(await area().getByRole("alert").count()).toBe(0);
    await session.keyboard.press("Alt+Shift+B");
    await expect.poll(async () => (await place(response)).top).toBeLessThan(unstable.top - 20);
    await settled();
    // The band itself carries the mark on the sheet.
    expect(await session.sheet.knob("hi").getAttribute("aria-label")).toBe("Treble, selected, unstable at full boost");
    await session.keyboard.command("Copy band figures");
    await expect.poll(() => session.page.getByRole("status").innerText()).toBe("Copied the figures of 1 band.");
    expect((await clipboard()).split("\n")[1].split("\t").map((cell) => cell === "unstable")).toEqual([false, false, false, true, true, true, true, false, false, false]);
    expect(await struck(session.page.getByTestId("flatness"))).toBe("none");
    expect(await struck(session.page.locator("[data-figure=plateau] td").first())).toBe("line-through");
    expect(await struck(session.page.locator("[data-figure=plateau] td").last())).toBe("none");
  });
});
