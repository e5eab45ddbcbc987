import { readFile, rm, writeFile } from "node:fs/promises";
import type { Browser } from "playwright-core";
import { afterAll, afterEach, beforeAll, describe, expect, test } from "vitest";
import { newProject } from "../../core/model/new-project.ts";
import { restoreProject } from "../../core/model/restore.ts";
import { serializeProject } from "../../core/model/serialize.ts";
import { launchBrowser } from "../helpers/browser.ts";
import { DEMO, Session } from "./session.ts";

let browser: Browser;
let session: Session;

beforeAll(async () => {
  browser = await launchBrowser();
});
afterAll(() => browser.close());
afterEach(() => session.end());

const EMPTY = serializeProject({ ...newProject(), name: "Plain" });
const MINE = serializeProject({ ...newProject(), name: "Mine" });
const BROKEN = JSON.stringify({ ...newProject(), supply: { kind: "split", positive: -3, negative: 15 }, wires: [{ from: "in.out" }] });
const LOOP = serializeProject({ ...newProject(), name: "Loop", wires: [{ from: "in.out", to: "out.in" }, { from: "eq.out", to: "eq.in" }] });

describe("files", () => {
  test("a demo saved under a name reopens as it was saved, byte for byte", async () => {
    session = await Session.start(browser, { file: DEMO });
    await session.sheet.knob("b1k").focus();
    await session.keyboard.press("End", "Control+s");
    await session.dialog("Save the project as").waitFor();
    await session.keyboard.type("My channel");
    await session.keyboard.press("Enter");
    await expect.poll(() => session.subtitle()).toContain("· saved");
    const text = await readFile(session.path("My channel.bandwright"), "utf8");
    const saved = restoreProject(text).project;
    expect(serializeProject(saved)).toBe(text);
    const demo = restoreProject(await readFile(DEMO, "utf8")).project;
    expect(saved).toEqual({ ...demo, blocks: demo.blocks.map((b) => (b.id === "b1k" ? { ...b, slider: { ...b.slider, position: 1 } } : b)) });

    await session.sheet.knob("b1k").focus();
    await session.keyboard.press("Home");
    await session.keyboard.press("Control+o");
    await session.dialog(/Save .* first/).getByRole("button", { name: "Discard changes" }).click();
    await session.page.getByRole("option", { name: "My channel" }).click();
    await session.keyboard.press("Enter");
    await expect.poll(() => session.sheet.position("b1k")).toBe(100);
    expect(await session.subtitle()).toContain("· saved");
  });

  test("an old file of that name is replaced only when asked for", async () => {
    session = await Session.start(browser, { file: DEMO, projects: { "Taken.bandwright": EMPTY } });
    await session.keyboard.press("Control+Shift+s");
    await session.dialog("Save the project as").getByLabel("File name").fill("Taken");
    await session.keyboard.press("Enter");
    await session.dialog(/^Replace/).getByRole("button", { name: "Keep the old file" }).click();
    expect(await readFile(session.path("Taken.bandwright"), "utf8")).toBe(EMPTY);
    await session.keyboard.press("Control+Shift+s");
    await session.dialog("Save the project as").getByLabel("File name").fill("Taken");
    await session.keyboard.press("Enter");
    await session.dialog(/^Replace/).getByRole("button", { name: "Replace it" }).click();
    await expect.poll(() => readFile(session.path("Taken.bandwright"), "utf8")).toBe(await readFile(DEMO, "utf8"));
  });

  test("a file that changed on disk is not overwritten unasked", async () => {
    session = await Session.start(browser, { projects: { "Plain.bandwright": EMPTY } });
    await session.keyboard.press("Control+o");
    await session.page.getByRole("option", { name: "Plain" }).dblclick();
    await expect.poll(() => session.page.title()).toContain("Plain");
    await session.keyboard.press("g");
    const other = serializeProject({ ...newProject(), name: "Elsewhere" });
    await writeFile(session.path("Plain.bandwright"), other);
    await session.keyboard.press("Control+s");
    await session.dialog("The file has changed on disk").getByRole("button", { name: "Cancel" }).click();
    expect(await readFile(session.path("Plain.bandwright"), "utf8")).toBe(other);
    await session.keyboard.press("Control+s");
    await session.dialog("The file has changed on disk").getByRole("button", { name: "Replace it" }).click();
    await expect.poll(() => session.subtitle()).toContain("1 band on 1 bus · ±15 V · saved");
  });

  test("a broken file lists every fault, stays as it is, and what was open stays open", async () => {
    session = await Session.start(browser, { file: DEMO, projects: { "broken.bandwright": BROKEN } });
    await session.keyboard.press("Control+o");
    await session.page.getByRole("option", { name: "broken" }).dblclick();
    const dialog = session.dialog("broken.bandwright was not opened");
    const faults = await dialog.getByRole("list", { name: "Faults" }).innerText();
    expect(faults).toContain("supply.positive");
    expect(faults).toContain("must be a number above 0, got -3");
    expect(faults).toContain("wires[0].to");
    expect(await dialog.innerText()).toContain("Mend these places in a text editor");
    await session.keyboard.press("Escape");
    expect(await session.page.title()).toContain("Saltmarsh");
    expect(await readFile(session.path("broken.bandwright"), "utf8")).toBe(BROKEN);
  });

  test("a file of a later version asks for a later program, and for no mending", async () => {
    session = await Session.start(browser, { file: DEMO, projects: { "later.bandwright": JSON.stringify({ format: "bandwright-project", version: 99 }) } });
    await session.keyboard.press("Control+o");
    await session.page.getByRole("option", { name: "later" }).dblclick();
    const words = await session.dialog("later.bandwright was not opened").innerText();
    expect(words).toContain("open it with a newer one");
    expect(words).not.toContain("Mend these places");
  });

  test("wiring faults open the board, and lead to the blocks", async () => {
    session = await Session.start(browser, { projects: { "loop.bandwright": LOOP } });
    await session.keyboard.press("Control+o");
    await session.page.getByRole("option", { name: "loop" }).dblclick();
    const card = session.page.getByRole("alert", { name: "Wiring faults" });
    await card.getByRole("button", { name: /runs in a loop/ }).click();
    expect(await session.panel.field("Label").getAttribute("placeholder")).toBe("eq");
    await session.panel.set("input R", "10k");
    expect(await session.subtitle()).toContain("edited");
  });

  test("an empty board invites, and the first band sounds at 1 kHz", async () => {
    session = await Session.start(browser, { file: DEMO });
    await session.menu("File", "New board");
    await session.page.getByRole("button", { name: "Add the first band" }).click();
    await expect.poll(() => session.sheet.bands()).toEqual(["b1k"]);
    expect(Number.parseFloat((await session.panel.figure("centre"))[0])).toBeGreaterThan(0.9);
    expect(await session.page.getByRole("button", { name: "Add the first band" }).count()).toBe(0);
  });

  test("a reload opens the file again and goes on working", async () => {
    session = await Session.start(browser, { file: DEMO });
    await session.page.reload();
    await session.page.locator(".app").waitFor();
    await session.sheet.knob("b1k").focus();
    await session.keyboard.press("End");
    expect(await session.sheet.position("b1k")).toBe(100);
    // Unsaved work is asked about before it is left.
    const asked = session.page.waitForEvent("dialog");
    const left = session.page.reload().catch(() => undefined);
    const dialog = await asked;
    expect(dialog.type()).toBe("beforeunload");
    await dialog.accept();
    await left;
    await session.page.locator(".app").waitFor();
    expect(await session.sheet.position("b1k")).toBeLessThan(100);
  });

  test("a reload goes on with the file that was open last, and keeps nothing of it in the browser", async () => {
    session = await Session.start(browser, { file: DEMO, projects: { "mine.bandwright": MINE } });
    await session.keyboard.press("Control+o");
    await session.page.getByRole("option", { name: "mine" }).dblclick();
    await expect.poll(() => session.page.title()).toContain("Mine");
    await session.page.reload();
    await session.page.locator(".app").waitFor();
    expect(await session.page.title()).toContain("Mine");
    expect(await session.page.evaluate(() => [Object.keys(localStorage), Object.keys(sessionStorage)])).toEqual([[], ["bandwright-token"]]);
    // Where it is gone meanwhile, the page comes up with what the session began with.
    await rm(session.path("mine.bandwright"));
    await session.page.reload();
    await session.page.locator(".app").waitFor();
    expect(await session.page.title()).toContain("Saltmarsh");
  });

  test("an address used a second time says so", async () => {
    session = await Session.start(browser, { file: DEMO });
    const other = await browser.newContext();
    const page = await other.newPage();
    await page.goto(session.app.url);
    await page.getByRole("heading", { name: "Not connected" }).waitFor();
    expect(await page.getByRole("alert").innerText()).toContain("has been used already");
    await other.close();
  });
});

describe("when the machine's side is gone", () => {
  test("the page says so, keeps the board, and gives out a copy", async () => {
    session = await Session.start(browser, { file: DEMO });
    await session.sheet.knob("b1k").focus();
    await session.keyboard.press("End");
    await session.app.stop();
    const banner = session.page.getByRole("alert").filter({ hasText: "connection to Bandwright has ended" });
    const download = session.page.waitForEvent("download");
    await banner.getByRole("button", { name: "Download a copy" }).click();
    const copy = restoreProject(await readFile(await (await download).path(), "utf8")).project;
    expect(copy.blocks.find((b) => b.id === "b1k")!.slider!.position).toBe(1);
    await session.keyboard.press("Control+s");
    await session.dialog("Save the project as").getByText("The connection to Bandwright has ended").waitFor();
    // The browser tells of the broken connection, as it should.
    session.complaints.splice(0);
  });
});

describe("without a pointer", () => {
  test("open a demo, slide, change a value, add a band, save, read the keys", async () => {
    session = await Session.start(browser, { size: { width: 1024, height: 700 }, lateFrames: true });
    const { keyboard, page } = session;
    await keyboard.command("open a demo");
    await page.getByRole("option", { name: /Saltmarsh/ }).waitFor();
    await keyboard.press("End", "Enter");
    await expect.poll(() => page.title()).toContain("Saltmarsh");

    await keyboard.tabTo(session.sheet.knob("b250"));
    await keyboard.press("Enter", "PageUp");
    await keyboard.tabTo(session.panel.field("series R"));
    await keyboard.type("680");
    await keyboard.press("Enter");
    expect(await session.panel.value("series R")).toBe("680");

    await keyboard.command("add level");
    await expect.poll(() => session.subtitle()).toContain("9 bands on 1 bus");
    await keyboard.press("Control+s");
    await session.dialog("Save the project as").waitFor();
    await keyboard.type("By hand");
    await keyboard.press("Enter");
    await expect.poll(() => session.subtitle()).toContain("· saved");
    expect(restoreProject(await readFile(session.path("By hand.bandwright"), "utf8")).project.blocks.find((b) => b.id === "b250")!.parts!.seriesR.value).toBe(680);

    await keyboard.command("keys");
    expect(await session.dialog("Keys").innerText()).toContain("Ctrl+Shift+Z");
    await keyboard.press("Escape");
    await keyboard.command("night");
    expect(await page.locator("html").getAttribute("data-theme")).toBe("night");
  });

  test("a dialog lets the hands tab on from its first control, however late its frames are", async () => {
    session = await Session.start(browser, { file: DEMO, lateFrames: true });
    const { keyboard, page } = session;
    await keyboard.command("build units");
    await session.dialog("Build units").waitFor();
    await keyboard.press("Tab");
    const focused = (): Promise<string> => page.evaluate(() => document.activeElement?.outerHTML ?? "");
    const there = await focused();
    expect(there).toContain("button");
    await page.waitForTimeout(300);
    expect(await focused()).toBe(there);
  });
});
