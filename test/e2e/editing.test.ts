import { readFile } from "node:fs/promises";
import type { Browser } from "playwright-core";
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, test } from "vitest";
import { bandFigures } from "../../core/analysis/bands.ts";
import { respond } from "../../core/analysis/response.ts";
import { setPosition } from "../../core/model/edit.ts";
import { applyPatch } from "../../core/model/patch.ts";
import type { Project } from "../../core/model/project.ts";
import { restoreProject } from "../../core/model/restore.ts";
import { resolveBoard } from "../../core/net/board.ts";
import { compileBoard } from "../../core/net/star.ts";
import { formatDb, formatFigure } from "../../core/units.ts";
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
beforeEach(async () => {
  session = await Session.start(browser, { file: DEMO });
});
afterEach(() => session.end());

/** dB at a band's centre with its slider somewhere, from the core alone. */
function gainAt(project: Project, id: string, position: number): number {
  const centre = bandFigures(resolveBoard(project)).find((f) => f.id === id)!.boost.frequency!;
  return respond(compileBoard(resolveBoard(applyPatch(project, setPosition(project, id, position)))), new Float64Array([centre])).gain[0];
}

describe("what the screen says is what the core computes", () => {
  test("band figures and the gain now", async () => {
    const figures = bandFigures(resolveBoard(demo));
    for (const id of ["b63", "b1k"]) {
      const wanted = figures.find((f) => f.id === id)!;
      await session.sheet.pick(id);
      expect(await session.panel.figure("peak")).toEqual([formatDb(wanted.boost.peak), formatDb(wanted.cut.peak)]);
      expect(await session.panel.figure("centre")).toEqual([formatFigure(wanted.boost.frequency!, "frequency"), formatFigure(wanted.cut.frequency!, "frequency")]);
      expect(await session.panel.figure("Q")).toEqual([formatFigure(wanted.boost.q!, "plain"), formatFigure(wanted.cut.q!, "plain")]);
      expect(await session.panel.figure("isolated")).toEqual([formatDb(wanted.isolatedBoost), formatDb(-wanted.isolatedBoost)]);
      expect((await session.panel.figure("lost in circuit"))[0]).toBe(formatDb(-wanted.interactionLoss));
      expect(await session.panel.liveGain()).toBe(`${formatDb(gainAt(demo, id, demo.blocks.find((b) => b.id === id)!.slider!.position), 2)} now`);
    }
    expect(await session.page.title()).toContain(demo.name);
    expect(await session.subtitle()).toBe("8 bands on 1 bus · ±15 V · read-only demo");
  });
});

describe("sliders", () => {
  test("a knob dragged with the pointer takes curve and gain along, and is one undo step", async () => {
    await session.sheet.pick("b1k");
    const [before, gain, position] = [await session.sheet.response(), await session.panel.liveGain(), await session.sheet.position("b1k")];
    await session.sheet.drag("b1k", 25, async () => {
      // Before the button is let go.
      expect(await session.sheet.position("b1k")).toBeGreaterThan(position);
      expect(await session.panel.liveGain()).not.toBe(gain);
    });
    const moved = await session.sheet.position("b1k");
    expect(await session.panel.liveGain()).toBe(`${formatDb(gainAt(demo, "b1k", Number(await session.panel.value("Slider position as a number"))), 2)} now`);
    expect(await session.sheet.response()).not.toBe(before);
    expect(await session.subtitle()).toContain("edited");
    await session.keyboard.undo();
    expect(await session.sheet.position("b1k")).toBe(position);
    expect(await session.sheet.response()).toBe(before);
    expect(await session.subtitle()).toContain("read-only demo");
    await session.keyboard.redo();
    expect(await session.sheet.position("b1k")).toBe(moved);
  });

  test("Esc during a drag puts it back and leaves nothing to undo", async () => {
    const position = await session.sheet.position("b250");
    await session.sheet.drag("b250", 25, async () => {
      expect(await session.sheet.position("b250")).not.toBe(position);
      await session.keyboard.press("Escape");
    });
    expect(await session.sheet.position("b250")).toBe(position);
    expect(await session.subtitle()).toContain("read-only demo");
  });

  test("a hand that points leaves no ring, a key that walks does", async () => {
    const hasRing = (): Promise<boolean> => session.page.evaluate(() => document.activeElement?.matches(":focus-visible") ?? false);
    const box = (await session.sheet.knob("b1k").boundingBox())!;
    await session.page.mouse.click(box.x + box.width / 2, box.y + box.height / 2);
    expect(await session.sheet.knob("b1k").evaluate((element) => element === document.activeElement)).toBe(true);
    expect(await hasRing()).toBe(false);
    await session.page.mouse.click(box.x - 24, box.y + 40);
    expect(await hasRing()).toBe(false);
    await session.keyboard.press("Tab");
    expect(await hasRing()).toBe(true);
  });

  test("keys move it in steps, and the value is read out", async () => {
    const knob = session.sheet.knob("b500");
    await knob.focus();
    const before = await session.sheet.response();
    await knob.focus();
    await session.keyboard.press("End");
    expect(await session.sheet.position("b500")).toBe(100);
    await session.keyboard.press("0", "ArrowUp");
    expect(await session.sheet.position("b500")).toBe(51);
    await session.keyboard.press("Home");
    expect(await knob.getAttribute("aria-valuetext")).toContain(formatDb(gainAt(demo, "b500", 0)));
    expect(await session.sheet.response()).not.toBe(before);
  });
});

describe("the read-out of the pointer", () => {
  test("follows the board in the same frame while the pointer rests: by keys, by undo, by a value", async () => {
    const { page } = session;
    const readOut = page.getByTestId("cursor-reading");
    const box = (await page.locator("[data-response]").boundingBox())!;
    await page.mouse.move(box.x + box.width * 0.62, box.y + 40);
    const first = await readOut.innerText();
    expect(first).toMatch(/^[\d.]+ k?Hz · [+−]?\d+\.\d\d dB · −?\d+\.\d°$/);
    const [hertz] = first.split(" · ");
    /** What stands there when the next frame is about to be painted. */
    const afterKey = (key: string): Promise<string> => page.evaluate(
      (pressed) => new Promise<string>((resolve) => {
        document.activeElement!.dispatchEvent(new KeyboardEvent("keydown", { key: pressed, bubbles: true, cancelable: true }));
        document.activeElement!.dispatchEvent(new KeyboardEvent("keyup", { key: pressed, bubbles: true }));
        requestAnimationFrame(() => resolve(document.querySelector("[data-testid=cursor-reading]")!.textContent));
      }),
      key,
    );
    /** The same place as the response itself tells it, whole degrees. */
    const told = async (): Promise<string> => (await page.locator("[data-response]").getAttribute("aria-valuetext"))!;
    await session.sheet.knob("b1k").focus();
    const boosted = await afterKey("End");
    expect(boosted).not.toBe(first);
    expect(boosted.startsWith(`${hertz} · `)).toBe(true);
    expect(await told()).toContain(boosted.split(" · ")[1]);
    await session.keyboard.undo();
    expect(await readOut.innerText()).toBe(first);
    await session.sheet.pick("b1k");
    await session.panel.set("series R", "100");
    const retuned = await readOut.innerText();
    expect(await told()).toContain(retuned.split(" · ")[1]);
    expect(retuned).not.toBe(first);
  });
});

describe("values", () => {
  test("edited in the panel: trade notation, arithmetic, preferred values, a message under the field", async () => {
    await session.sheet.pick("b1k");
    const first = await session.panel.value("series R");
    const peak = await session.panel.figure("peak");
    await session.panel.set("series R", "1k2 + 300");
    expect(await session.panel.value("series R")).toBe("1.5k");
    expect(await session.panel.figure("peak")).not.toEqual(peak);
    await session.panel.field("series R").press("ArrowUp");
    expect(await session.panel.value("series R")).toBe("1.6k");
    await session.panel.set("series R", "lots");
    expect(await session.page.getByRole("alert").innerText()).toContain("expected a value such as");
    await session.keyboard.press("Escape");
    expect(await session.panel.value("series R")).toBe("1.6k");
    // The field is untouched again, so that undo is the board's.
    await session.keyboard.undo();
    await session.keyboard.undo();
    await session.page.locator("[data-response]").focus();
    expect(await session.panel.value("series R")).toBe(first);
    expect(await session.panel.figure("peak")).toEqual(peak);
  });

  test("edited in place on the sheet", async () => {
    await session.sheet.pick("b2k");
    await session.keyboard.press("F2");
    const field = session.page.getByLabel("2 kHz, series C");
    await field.fill("220n");
    await session.keyboard.press("Enter");
    await field.waitFor({ state: "detached" });
    expect(await session.panel.value("series C")).toBe("220 nF");
    await session.keyboard.undo();
    expect(await session.panel.value("series C")).not.toBe("220 nF");
  });

  test("tolerance, measured value, op amp, label, supply", async () => {
    await session.sheet.pick("b4k");
    await session.panel.set("Tolerance of series C", "2.5");
    await session.panel.set("Measured value of series C", "57n");
    await session.panel.choose("Op amp", "NE5532");
    await session.panel.set("Label", "Sparkle");
    await session.page.locator("[data-response]").focus();
    expect(await session.panel.value("Tolerance of series C")).toBe("2.5 %");
    expect(await session.panel.value("Measured value of series C")).toBe("57 nF");
    expect(await session.panel.field("Op amp").innerText()).toContain("NE5532");
    expect(await session.sheet.knob("b4k").getAttribute("aria-label")).toContain("Sparkle");
    await session.keyboard.press("Escape");
    await session.panel.set("positive rail", "9");
    expect(await session.subtitle()).toContain("+9 V / −15 V");
  });

  test("an optional part is fitted and taken out", async () => {
    await session.page.locator("[data-block=in]").focus();
    await session.keyboard.press("Enter");
    const had = (await session.panel.field("coupling C").count()) === 1;
    const [add, remove] = ["Add coupling C", "Remove coupling C"];
    await session.panel.field(had ? remove : add).click();
    expect(await session.panel.field("coupling C").count()).toBe(had ? 0 : 1);
    await session.panel.field(had ? add : remove).click();
    expect(await session.panel.field("coupling C").count()).toBe(had ? 1 : 0);
  });
});

describe("bands", () => {
  test("one is added, made another kind, copied and deleted, and all of it undone", async () => {
    const first = await session.sheet.bands();
    await session.menu("Bands", "Add gyrator section");
    const added = (await session.sheet.bands()).filter((id) => !first.includes(id));
    expect(added).toHaveLength(1);
    const id = added[0];
    await session.panel.choose("Kind of band", "Inductor section");
    expect(await session.panel.field("inductor").count()).toBe(1);
    expect(await session.panel.field("gyrator R").count()).toBe(0);
    await session.keyboard.command("duplicate");
    expect(await session.sheet.bands()).toHaveLength(first.length + 2);
    await session.keyboard.command("delete");
    await session.sheet.pick(id);
    await session.keyboard.press("Delete");
    expect((await session.sheet.bands()).toSorted()).toEqual(first.toSorted());
    for (let n = 0; n < 5; n++) await session.keyboard.undo();
    expect((await session.sheet.bands()).toSorted()).toEqual(first.toSorted());
    expect(await session.subtitle()).toContain("read-only demo");
  });

  test("the input is not deleted, and the screen says why", async () => {
    await session.page.locator("[data-block=in]").focus();
    await session.keyboard.press("Enter", "Delete");
    expect(await session.page.getByRole("status").innerText()).toContain("a board needs its input");
  });
});
