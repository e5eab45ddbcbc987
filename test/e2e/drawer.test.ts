import { readdir, readFile, rm, writeFile } from "node:fs/promises";
import { join } from "node:path";
import type { Browser, Locator } from "playwright-core";
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, test } from "vitest";
import { openDrawer } from "../../app/store/drawer-store.ts";
import { restoreProject } from "../../core/model/restore.ts";
import { launchBrowser } from "../helpers/browser.ts";
import { DEMO, Session } from "./session.ts";

let browser: Browser;
let session: Session;

beforeAll(async () => {
  browser = await launchBrowser();
});
afterAll(() => browser.close());
beforeEach(async () => {
  session = await Session.start(browser, { file: DEMO });
});
afterEach(() => session.end());

const TABLE = ["Part;Value;Tol;Voltage;Qty;Price EUR;Supplier", "C-SPARE-1;0,1u;5%;63;20;0,12;Quay", "C-SPARE-2;170n;1%;100;10;0,35;Quay", "C-BAD;banana;5%;63;2;0,1;Quay", "R-SPARE;4k7;1%;;100;0,01;Quay"].join("\n");

const user = {
  table: (): Locator => session.page.getByRole("grid", { name: "Lines of the drawer" }),
  cell: (id: string, column: number): Locator => user.table().getByRole("row").filter({ hasText: id }).getByRole("gridcell").nth(column),
  count: (): Promise<string> => session.page.locator(".filter-count").innerText(),
  status: (): Promise<string> => session.page.locator(".status-line").innerText(),
  panel: (): Promise<string> => session.page.getByRole("complementary", { name: "Panel" }).innerText(),
  find: (text: string): Promise<void> => session.page.getByRole("searchbox", { name: "Find lines" }).fill(text),
  async loadStarter(): Promise<void> {
    await session.keyboard.press("Alt+Shift+D");
    await session.page.getByRole("button", { name: "Look around with the starter drawer" }).click();
    await user.table().waitFor();
  },
};

describe("the drawer", () => {
  test("starter, import of a table with a bad line, filter, edit in the table, undo", async () => {
    await user.loadStarter();
    await expect.poll(user.count).toMatch(/^\d{3} lines$/);
    const starter = Number(/^(\d+) lines/.exec(await user.count())![1]);
    expect(starter).toBeGreaterThan(300);

    await session.menu("Drawer", "Import a table…");
    const dialog = session.dialog("Import a table");
    await dialog.getByLabel("Table file").setInputFiles({ name: "parts.csv", mimeType: "text/csv", buffer: Buffer.from(TABLE) });
    await dialog.getByText("4 rows: 3 new, 0 updated, 0 as they are, 1 refused.").waitFor();
    expect(await dialog.getByLabel("Meaning of Qty").inputValue()).toBe("quantity");
    expect(await dialog.getByRole("row", { name: /C-SPARE-1/ }).innerText()).toContain("capacitor 100n 5 %, 63 V, 20 there, 0.12 EUR");
    expect(await dialog.getByRole("table").last().innerText()).toMatch(/4\s+it is not said what kind/);
    // A column put to no use changes what would be taken.
    await dialog.getByLabel("Meaning of Voltage").selectOption("");
    await expect.poll(() => dialog.getByRole("row", { name: /C-SPARE-1/ }).innerText()).toContain("capacitor 100n 5 %, 20 there");
    await dialog.getByLabel("Meaning of Voltage").selectOption("rating");
    await dialog.getByText("skip bad lines and take the others").click();
    await dialog.getByRole("button", { name: "Import 3 rows" }).click();
    await session.dialog("Imported").getByRole("button", { name: "Close" }).click();
    await expect.poll(user.count).toBe(`${starter + 3} lines`);

    await user.find("100n 63V");
    await expect.poll(user.count).toMatch(/^\d+ lines of/);
    await user.find("spare film");
    await expect.poll(user.count).toMatch(/^0 lines of/);
    await user.find("spare");
    await expect.poll(user.count).toMatch(/^3 lines of/);
    expect(await user.cell("C-SPARE-2", 2).innerText()).toBe("170n");

    // Keyboard alone: from the field into the table, to the location of the second line, and edit it.
    await session.page.getByRole("searchbox").press("Enter");
    await session.keyboard.press("Home", "ArrowDown");
    for (let n = 0; n < 5; n++) await session.keyboard.press("ArrowRight");
    await session.keyboard.press("F2");
    await session.keyboard.type("film (polyester)");
    await session.keyboard.press("Tab");
    await session.keyboard.type("pitch 5 mm");
    await session.keyboard.press("Enter");
    await expect.poll(() => user.cell("C-SPARE-2", 6).innerText()).toBe("pitch 5 mm");
    expect(await user.cell("C-SPARE-2", 5).innerText()).toBe("film (polyester)");
    await expect.poll(user.status).toContain("Ctrl+Z in the drawer takes back: Edit C-SPARE-2");
    await session.keyboard.undo();
    await expect.poll(() => user.cell("C-SPARE-2", 6).innerText()).toBe("");
    await session.keyboard.redo();
    await expect.poll(() => user.cell("C-SPARE-2", 6).innerText()).toBe("pitch 5 mm");
    // A text that makes no sense is told, and given up with Esc.
    await session.keyboard.press("Home", "ArrowRight", "ArrowRight", "F2");
    await session.keyboard.type("nonsense");
    await session.keyboard.press("Enter");
    expect(await user.table().getByRole("alert").innerText()).toContain("expected a value such as");
    await session.keyboard.press("Escape");
    // What was done to the drawer is none of the board's business.
    expect(await session.subtitle()).toContain("read-only demo");

    await session.keyboard.press("Control+a");
    await expect.poll(user.panel).toContain("3 lines chosen");
    await session.page.getByLabel("location", { exact: true }).fill("shelf 9");
    await session.page.getByRole("button", { name: "Set on 3 lines" }).click();
    await expect.poll(() => user.cell("R-SPARE", 10).innerText()).toBe("shelf 9");
  });

  test("what a menu's entry brings up keeps the focus, by pointer and by keys", async () => {
    await user.loadStarter();
    const search = session.page.getByRole("searchbox", { name: "Find lines" });
    const hasFocus = (): Promise<boolean> => search.evaluate((field) => field === document.activeElement);
    await session.menu("Drawer", /^Find lines/);
    // A while, so that the menu has closed and given back what it would.
    await session.page.waitForTimeout(300);
    expect(await hasFocus()).toBe(true);

    await session.page.getByRole("menuitem", { name: "Drawer", exact: true }).focus();
    await session.keyboard.press("Enter", "f", "i", "n", "d", "Enter");
    await session.page.waitForTimeout(300);
    expect(await hasFocus()).toBe(true);
    await session.keyboard.type("100n");
    await expect.poll(user.count).toMatch(/ lines of /);
  });

  test("counting, the ledger, measured pieces and the value axis", async () => {
    await user.loadStarter();
    await user.find("C-180N-PET");
    await expect.poll(user.count).toMatch(/^1 line of/);
    await user.cell("C-180N-PET", 7).dblclick();
    await session.keyboard.type("12");
    await session.keyboard.press("Enter");
    await expect.poll(() => user.cell("C-180N-PET", 9).innerText()).toBe("12");
    await session.page.getByRole("tab", { name: "Ledger" }).click();
    await expect.poll(user.panel).toContain("counted");
    await session.page.getByRole("tab", { name: "Pieces" }).click();
    for (const value of ["181.5n", "178.9n"]) {
      await session.page.getByLabel("Measured value").fill(value);
      await session.keyboard.press("Enter");
      await expect.poll(() => session.page.getByLabel("Measured value").inputValue()).toBe("");
    }
    await expect.poll(user.panel).toContain("181.5 nF");
    await expect.poll(user.panel).toContain("−0.6 %");

    await session.page.getByRole("button", { name: "Show all" }).click();
    await session.page.getByText("Capacitors", { exact: true }).click();
    const axis = session.page.getByRole("slider", { name: /Values of capacitors/ });
    await expect.poll(() => axis.getAttribute("aria-valuetext")).toContain("10 pF");
    await axis.focus();
    await session.keyboard.press("End", "ArrowLeft", "ArrowLeft", "Enter");
    await expect.poll(user.count).toMatch(/^\d{1,2} lines of/);
    await session.page.getByRole("button", { name: /show every value again/ }).click();
    await expect.poll(user.count).toMatch(/^1\d\d lines of/);
  });

  test("a capacitor is swapped with the dotted response on the sheet, and taken as one step", async () => {
    await user.loadStarter();
    await session.keyboard.press("Alt+Shift+B");
    await session.sheet.pick("b1k");
    const list = session.page.getByRole("region", { name: "In the drawer" });
    const card = list.getByRole("button", { name: /^150n/ }).first();
    await card.waitFor();
    expect(await card.innerText()).toMatch(/peak.[+−±][\d.]+.dB · centre.\+[\d.]+.% · Q.\+[\d.]+.%/);
    // What is left is what the drawer has now, less the one.
    const shelf = await openDrawer({ path: join(session.home, "drawer.sqlite"), now: () => new Date() });
    const free = shelf.find(/C-150N-\w+/.exec(await card.innerText())![0])!.quantity;
    shelf.close();
    expect(await card.innerText()).toContain(`${free - 1} left`);
    const before = await session.sheet.response();
    await card.focus();
    // Dotted, until the focus goes somewhere else.
    expect((await session.sheet.response()) === before).toBe(false);
    await session.panel.field("Label").focus();
    await expect.poll(async () => (await session.sheet.response()) === before).toBe(true);
    await card.focus();
    await session.keyboard.press("Enter");
    await expect.poll(() => session.panel.value("series C")).toBe("150 nF");
    expect(await session.subtitle()).toContain("edited");
    await list.getByText("in place").waitFor();
    await session.keyboard.press("Control+s");
    await session.dialog("Save the project as").waitFor();
    await session.keyboard.type("Swapped");
    await session.keyboard.press("Enter");
    await expect.poll(() => session.subtitle()).toContain("· saved");
    const saved = restoreProject(await readFile(session.path("Swapped.bandwright"), "utf8")).project;
    expect(saved.blocks.find((b) => b.id === "b1k")!.parts!.seriesC).toMatchObject({ value: 1.5e-7, stock: expect.stringContaining("C-150N") });
    await session.page.locator("[data-response]").focus();
    await session.keyboard.undo();
    expect(await session.panel.value("series C")).toBe("180 nF");

    await list.getByText("two parts").click();
    await list.getByText(/two in (series|parallel)/).first().waitFor();
  });

  test("a board is filled, five units are reserved, what is missing is on the shopping list", async () => {
    await user.loadStarter();
    await session.menu("Drawer", "Fill the board from the drawer…");
    const placed = session.page.getByTestId("fill-placed");
    await placed.waitFor();
    expect(await placed.innerText()).toMatch(/^5\d of 56$/);
    await session.page.getByRole("button", { name: /^Take \d+ parts/ }).click();
    expect(await session.subtitle()).toContain("edited");

    await session.menu("Drawer", "Build units…");
    const dialog = session.dialog("Build units");
    const units = dialog.getByLabel(/^Units of/);
    await units.fill("5");
    const shopping = dialog.getByRole("region", { name: "Shopping list" });
    await shopping.waitFor();
    // More than there are is refused, and the line is named; nothing is held then.
    await dialog.getByRole("button", { name: "Reserve 5 units" }).click();
    expect(await dialog.getByRole("alert").innerText()).toMatch(/: \d+ wanted, but only \d+ of \d+ are free/);
    const names = await shopping.locator("tbody tr td:first-child").evaluateAll((cells) => cells.map((cell) => cell.firstChild!.textContent));
    expect(names.length).toBeGreaterThan(0);
    await session.keyboard.press("Escape");

    // What is missing is bought; then it goes.
    await session.keyboard.press("Alt+Shift+D");
    for (const name of names) {
      await user.find(name!);
      await expect.poll(user.count).toMatch(/^1 line of/);
      await user.cell(name!, 7).dblclick();
      await session.keyboard.type("200");
      await session.keyboard.press("Enter");
      await expect.poll(() => user.cell(name!, 7).innerText()).toBe("200");
    }
    await session.menu("Drawer", "Build units…");
    await units.fill("5");
    await expect.poll(() => dialog.getByTestId("build-ready").innerText()).toBe("every part is there");
    await dialog.getByRole("button", { name: "Reserve 5 units" }).click();
    await dialog.getByText("The parts of 5 units are reserved.").waitFor();
    await units.fill("2");
    await dialog.getByRole("button", { name: "Use 2 units" }).click();
    await dialog.getByText("2 units built. The parts of 3 units are reserved.").waitFor();
    await session.keyboard.press("Escape");
    await expect.poll(() => user.cell(names.at(-1)!, 8).innerText()).toMatch(/^\d+$/);
    expect(await user.panel()).toContain("Held by Saltmarsh voice channel");

    // Units that nobody reserved are used as one step, which one undo takes back.
    const free = await user.cell(names.at(-1)!, 9).innerText();
    const there = await user.cell(names.at(-1)!, 7).innerText();
    await session.menu("Drawer", "Build units…");
    await units.fill("4");
    await dialog.getByRole("button", { name: "Use 4 units" }).click();
    await dialog.getByText("6 units built. Nothing is reserved for it now.").waitFor();
    await session.keyboard.press("Escape");
    await expect.poll(() => user.cell(names.at(-1)!, 8).innerText()).toBe("–");
    await session.keyboard.undo();
    await expect.poll(() => user.cell(names.at(-1)!, 7).innerText()).toBe(there);
    await expect.poll(() => user.cell(names.at(-1)!, 9).innerText()).toBe(free);

    // Another project is told who holds the pieces.
    await session.keyboard.press("Alt+Shift+B");
    await session.page.getByLabel("Name of the board").fill("Second channel");
    await session.keyboard.press("Enter");
    await session.menu("Drawer", "Build units…");
    await units.fill("60");
    await dialog.getByRole("button", { name: "Reserve 60 units" }).click();
    expect(await dialog.getByRole("alert").innerText()).toContain("held by Saltmarsh voice channel");
    await session.keyboard.press("Escape");
    await session.keyboard.undo();
    await session.keyboard.undo();
    expect(await session.subtitle()).toContain("read-only demo");
  });
});

describe("a drawer that cannot be used", () => {
  test("damaged: the copy is named, the file stays, and the next try goes on once it is mended", async () => {
    const file = join(session.home, "drawer.sqlite");
    await writeFile(file, "SQLite format 3\0 cut short");
    await session.keyboard.press("Alt+Shift+D");
    const alert = session.page.getByRole("alert", { name: "The drawer cannot be used" });
    await alert.waitFor();
    const text = await alert.innerText();
    expect(text).toContain("is damaged");
    const copy = /The copy: (.*)/.exec(text)![1];
    expect(await readFile(copy, "utf8")).toBe("SQLite format 3\0 cut short");
    await alert.getByRole("button", { name: "Try again" }).click();
    await alert.waitFor();
    await rm(file);
    await alert.getByRole("button", { name: "Try again" }).click();
    await session.page.getByRole("heading", { name: "Nothing in the drawer yet" }).waitFor();
  });

  test("a file that never was a drawer: it is told of, and nothing is put beside it", async () => {
    const file = join(session.home, "drawer.sqlite");
    await writeFile(file, "Dear all, this is a letter.");
    await session.keyboard.press("Alt+Shift+D");
    const alert = session.page.getByRole("alert", { name: "The drawer cannot be used" });
    await alert.waitFor();
    expect(await alert.innerText()).toContain("is not a drawer");
    expect(await readFile(file, "utf8")).toBe("Dear all, this is a letter.");
    expect((await readdir(session.home)).filter((name) => name.startsWith("drawer"))).toEqual(["drawer.sqlite"]);
  });

  test("newer than the program: both versions are named", async () => {
    const file = join(session.home, "drawer.sqlite");
    (await openDrawer({ path: file, now: () => new Date() })).close();
    const bytes = await readFile(file);
    // Where the format keeps the version that its user gave it.
    bytes.writeUInt32BE(99, 60);
    await writeFile(file, bytes);
    await session.keyboard.press("Alt+Shift+D");
    const alert = session.page.getByRole("alert", { name: "The drawer cannot be used" });
    await alert.waitFor();
    expect(await alert.innerText()).toMatch(/version 99, this program knows versions up to \d/);
    expect((await readFile(file)).equals(bytes)).toBe(true);
    // The board does not mind.
    await session.keyboard.press("Alt+Shift+B");
    await session.sheet.pick("b1k");
    expect(await session.panel.value("series C")).toBe("180 nF");
  });
});
