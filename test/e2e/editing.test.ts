import { readFile, writeFile } from "node:fs/promises";
import type { Browser, Locator } from "playwright-core";
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, test } from "vitest";
import { bandFigures } from "../../core/analysis/bands.ts";
import { respond } from "../../core/analysis/response.ts";
import { setPosition } from "../../core/model/edit.ts";
import { newProject } from "../../core/model/new-project.ts";
import { applyPatch } from "../../core/model/patch.ts";
import type { Project } from "../../core/model/project.ts";
import { restoreProject } from "../../core/model/restore.ts";
import { serializeProject } from "../../core/model/serialize.ts";
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
    // However long it is, it pushes the panel's columns nowhere.
    expect(await session.page.locator(".panel").evaluate((panel) => panel.scrollWidth - panel.clientWidth)).toBe(0);
    await session.keyboard.press("Escape");
    expect(await session.panel.value("series R")).toBe("1.6k");
    // The field is untouched again, so that undo is the board's.
    await session.keyboard.undo();
    await session.keyboard.undo();
    await session.page.locator("[data-response]").focus();
    expect(await session.panel.value("series R")).toBe(first);
    expect(await session.panel.figure("peak")).toEqual(peak);
  });

  test("a value that no part has is taken, with a caution under the field and among the warnings", async () => {
    await session.sheet.pick("b1k");
    const field = session.panel.field("series C");
    const described = (): Promise<string | null> => field.evaluate((input) => {
      const id = input.getAttribute("aria-describedby");
      return id === null ? null : document.getElementById(id)!.innerText;
    });
    expect(await described()).toBeNull();
    await session.panel.set("series C", "2*4k7");
    expect(await described()).toContain("outside what capacitors are made in: 0.5 pF to 100000 µF");
    expect(await session.page.getByRole("alert").count()).toBe(0);
    await session.page.getByRole("button", { name: "1 warning" }).click();
    expect(await session.page.getByRole("dialog", { name: "Warnings" }).innerText()).toContain("series C of “1 kHz”");
    await session.keyboard.press("Escape");
    await session.panel.set("series C", "180n");
    expect(await described()).toBeNull();
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

  test("two pieces stand as they are joined; looking changes nothing, typing replaces both, undo brings them back", async () => {
    const withPairs: Project = {
      ...demo, name: "Pairs",
      blocks: demo.blocks.map((b) => (b.id !== "b1k" ? b : {
        ...b,
        parts: {
          ...b.parts,
          seriesR: { value: 1 / (1 / 4700 + 1 / 220), stock: "R-4K7", second: { value: 220, firstValue: 4700, joined: "parallel" } },
          seriesC: { value: 182.2e-9, second: { value: 2.2e-9, firstValue: 180e-9, joined: "parallel" } },
          gyratorR: { value: 91220, second: { value: 220, firstValue: 91e3, joined: "series" } },
        },
      })),
    };
    await writeFile(session.path("Pairs.bandwright"), serializeProject(withPairs));
    await session.keyboard.press("Control+o");
    await session.page.getByRole("option", { name: "Pairs" }).dblclick();
    await expect.poll(() => session.page.title()).toContain("Pairs");
    await session.sheet.pick("b1k");
    const notes = session.page.locator(".part-grid .field-note");
    expect(await notes.allInnerTexts()).toEqual([
      "180n ∥ 2n2 in parallel · typing replaces both", "4k7 ∥ 220R in parallel · typing replaces both", "91k + 220R in series · typing replaces both",
    ]);
    const field = session.panel.field("series R");
    expect(await field.inputValue()).toBe("210.2 Ω");
    // Nothing of it is cut off.
    expect(await field.evaluate((input) => input.scrollWidth - input.clientWidth)).toBeLessThanOrEqual(0);
    await field.focus();
    expect(await field.inputValue()).toBe("210.2");
    await session.keyboard.press("End", "0", "Backspace", "Enter", "Tab");
    expect(await session.subtitle()).toContain("saved");
    expect(await notes.count()).toBe(3);
    await session.panel.set("series R", "470");
    expect(await notes.count()).toBe(2);
    await session.page.locator("[data-response]").focus();
    expect(await field.inputValue()).toBe("470 Ω");
    await session.keyboard.undo();
    expect(await notes.count()).toBe(3);
    // In place on the sheet likewise.
    await session.keyboard.press("F2");
    const place = session.page.getByLabel("1 kHz, series C");
    expect(await place.inputValue()).toBe("182.2n");
    expect(await session.page.locator(".sheet-value").innerText()).toBe("180n ∥ 2n2 in parallel · typing replaces both");
    await place.fill("100n");
    await session.keyboard.press("Enter");
    await expect.poll(() => notes.count()).toBe(2);
  });

  test("two pieces in the supply's divider are replaced likewise, with what was known of them", async () => {
    const single: Project = {
      ...newProject(), name: "Divider",
      supply: { kind: "single", voltage: 9, reference: { upperR: { value: 10220, stock: "R-10K", second: { value: 220, firstValue: 10e3, joined: "series" } }, lowerR: { value: 10e3 }, bypassC: { value: 47e-6 } } },
    };
    await writeFile(session.path("Divider.bandwright"), serializeProject(single));
    await session.keyboard.press("Control+o");
    await session.page.getByRole("option", { name: "Divider" }).dblclick();
    const notes = session.page.locator(".part-grid .field-note");
    await expect.poll(() => notes.allInnerTexts()).toEqual(["10k + 220R in series · typing replaces both"]);
    await session.panel.set("upper R", "12k");
    expect(await notes.count()).toBe(0);
    await session.keyboard.press("Control+s");
    await expect.poll(() => session.subtitle()).toContain("saved");
    expect(restoreProject(await readFile(session.path("Divider.bandwright"), "utf8")).project.supply).toMatchObject({ reference: { upperR: { value: 12e3 } } });
    expect(await readFile(session.path("Divider.bandwright"), "utf8")).not.toContain("R-10K");
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

describe("work on the whole board", () => {
  test("a band selected meanwhile has its own panel, and what was found and typed is there again afterwards", async () => {
    const { page } = session;
    const panel = page.getByRole("complementary", { name: "Panel" });
    await session.keyboard.press("Alt+Shift+D");
    await page.getByRole("button", { name: "Look around with the starter drawer" }).click();
    await page.getByRole("grid", { name: "Lines of the drawer" }).waitFor();
    await session.keyboard.command("fill the board");
    const placed = page.getByTestId("fill-placed");
    await placed.waitFor();
    await panel.getByLabel("units").fill("3");
    const take = panel.getByRole("button", { name: /^Take \d+ parts$/ });
    await expect.poll(() => take.isEnabled()).toBe(true);
    const found = [await placed.innerText(), await take.innerText()];
    // With the pointer, by a band's figures.
    const box = (await session.sheet.knob("b1k").boundingBox())!;
    await page.mouse.click(box.x + box.width / 2, box.y + box.height / 2);
    await session.panel.field("series C").waitFor();
    expect(await placed.isVisible()).toBe(false);
    expect(await panel.innerText()).toContain("Fill from the drawer waits; nothing is changed yet.");
    await session.panel.set("series R", "560");
    // What was found for the board before the edit is not for taking.
    const isTakenAtOnce = await panel.getByRole("button", { name: "Back to it" }).evaluate(async (back: HTMLElement) => {
      const button = document.querySelector<HTMLButtonElement>(".panel-foot .button.is-primary")!;
      back.click();
      while (button.offsetParent === null) await Promise.resolve();
      return !button.disabled;
    });
    expect(isTakenAtOnce).toBe(false);
    await expect.poll(() => take.isEnabled()).toBe(true);
    await expect.poll(async () => [await placed.innerText(), await take.innerText()]).toEqual(found);
    expect(await panel.getByLabel("units").inputValue()).toBe("3");
    expect(await panel.innerText()).toContain("Selected: “1 kHz”");
    await panel.getByRole("button", { name: "Show its values" }).click();
    expect(await session.panel.value("series R")).toBe("560 Ω");
    // Swapping a part of the band puts the work aside, too, and nothing selected is the board as a whole again.
    await session.keyboard.command("swap a part");
    await session.sheet.knob("b2k").focus();
    await session.keyboard.press("Enter", "Escape");
    await expect.poll(() => placed.isVisible()).toBe(true);
    // Asked for again, the same work is still the same.
    await session.sheet.pick("b2k");
    await session.keyboard.command("fill the board");
    await expect.poll(() => placed.isVisible()).toBe(true);
    expect(await panel.getByLabel("units").inputValue()).toBe("3");
    await take.click();
    await expect.poll(() => page.getByRole("status").innerText()).toMatch(/^Filled \d+ parts/);
    expect(await panel.innerText()).not.toContain("waits");
    expect(await session.panel.field("series C").count()).toBe(1);
    // On another board nobody asked for it.
    await session.keyboard.command("fill the board");
    await expect.poll(() => placed.isVisible()).toBe(true);
    await session.keyboard.command("new board");
    await session.dialog(/first\?$/).getByRole("button", { name: "Discard changes" }).click();
    await expect.poll(() => panel.innerText()).toContain("Select a block to see its values.");
    expect(await placed.count()).toBe(0);
  });
});

describe("keys after a menu", () => {
  test("the first key after Esc is not lost on the menu that closes", async () => {
    const box = (await session.sheet.knob("b1k").boundingBox())!;
    await session.page.mouse.click(box.x + box.width / 2, box.y + 80, { button: "right" });
    await session.page.getByRole("menu").waitFor();
    await session.keyboard.press("Escape", "Alt+Shift+E");
    await session.page.getByRole("main", { name: "Equations" }).waitFor();
  });
});

/** Puts a copy with other words in the place of an element. */
async function longer(element: Locator, words: string): Promise<void> {
  await element.evaluate((own, text) => {
    const copy = own.cloneNode() as HTMLElement;
    copy.textContent = text;
    own.after(copy);
    (own as HTMLElement).style.display = "none";
  }, words);
}

describe("a small window", () => {
  test("nothing in the status line makes the screen wider than the window, nor cuts the board's state off", async () => {
    const { page } = session;
    await page.setViewportSize({ width: 1024, height: 700 });
    await session.sheet.pick("b1k");
    // Long words in the line: what was opened, what is being computed.
    await session.keyboard.command("All sliders to full boost");
    // In copies, since the screen goes on renewing its own.
    await longer(page.getByTestId("stability"), "smallest phase margin 123° (a band with quite a long name of its own) · computing…");
    await longer(page.getByRole("status").locator("span"), "Opened a-project-with-a-very-long-name-that-goes-on-and-on-and-on.bandwright.");
    expect(await page.evaluate(() => document.documentElement.scrollWidth)).toBe(1024);
    const panel = (await page.getByRole("complementary", { name: "Panel" }).boundingBox())!;
    expect(panel.x + panel.width).toBeLessThanOrEqual(1024);
    await session.keyboard.undo();
    expect(await session.subtitle()).toContain("read-only demo");
    expect(await page.getByTestId("subtitle").evaluate((element) => element.scrollWidth - element.clientWidth)).toBeLessThanOrEqual(0);
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

  test("what was done is told in a status that stays, and a band added by key has the focus", async () => {
    const { page, keyboard } = session;
    const status = page.getByRole("status");
    const element = await status.elementHandle();
    await session.sheet.knob("b1k").focus();
    await keyboard.press("h");
    expect(await status.innerText()).toBe("Added high shelf section “High”.");
    const focused = (): Promise<string | null> => page.evaluate(() => document.activeElement!.getAttribute("aria-label"));
    expect(await focused()).toContain("High");
    await keyboard.command("Add inductor section");
    await expect.poll(() => status.innerText()).toMatch(/^Added inductor section “/);
    expect(await focused()).toContain((await status.innerText()).split(/[“”]/)[1]);
    await keyboard.press("Delete");
    expect(await status.innerText()).toMatch(/^Deleted “/);
    await keyboard.undo();
    expect(await status.innerText()).toMatch(/^Undone: delete “/);
    expect(await status.evaluate((now, then) => now === then, element)).toBe(true);
    for (let n = 0; n < 2; n++) await keyboard.undo();
    expect(await session.subtitle()).toContain("read-only demo");
  });

  test("the input is not deleted, and the screen says why", async () => {
    await session.page.locator("[data-block=in]").focus();
    await session.keyboard.press("Enter", "Delete");
    expect(await session.page.getByRole("status").innerText()).toContain("a board needs its input");
  });
});
