import { readFileSync } from "node:fs";
import fc from "fast-check";
import { beforeEach, describe, expect, test, vi } from "vitest";
import { exportTable } from "../../app/services/drawer-tables.ts";
import { decodeTable, openTable } from "../../app/services/csv-table.ts";
import type { DrawerStore } from "../../app/store/drawer-store.ts";
import { isHostFailure } from "../../core/contract/failures.ts";
import { guardFormula, unguardFormula } from "../../core/drawer/formula-guard.ts";
import { anyLine, capacitor, importText, openScratch, resistor, withScratch } from "../helpers/drawer.ts";

// Real files, flushed: a busy disk takes its time.
vi.setConfig({ testTimeout: 30_000 });

const STARTER = readFileSync(new URL("../../assets/drawer/starter.csv", import.meta.url), "utf8");

let drawer: DrawerStore;
beforeEach(async () => {
  drawer = await openScratch();
});

async function refusal(source: string): Promise<readonly string[]> {
  const error: unknown = await importText(drawer, source).catch((caught: unknown) => caught);
  if (!isHostFailure(error, "import-refused")) throw new Error(`not refused: ${String(error)}`);
  return error.data.faults.map((fault) => `${fault.row}: ${fault.message}`);
}

describe("an import", () => {
  test("reads what a spreadsheet of another country has written: semicolons, decimal commas, its own headers, old letters", async () => {
    const table = [
      "Bezeichnung;Part name;Type;Value;Tol.;Power rating;Dielectric;Shelf;Stock qty;Price (EUR);Price 100+;Supplier;Order no.",
      ";R 4k7;Resistor;4,7k;1%;0,25 W;metal film;Kästchen 3;1.200;0,08;0,05;Harbour;HC-1",
      ";C blue;Cap;100nF;±5 %;63 V;film;Kästchen 4;40 pcs;0,14;;Harbour;HC-2",
      ";Slider;pot;50k;20%;1/4W;;Front;12;1,15;;;",
    ].join("\r\n");
    // Every one of these letters is one byte there.
    const bytes = Uint8Array.from(table, (letter) => letter.charCodeAt(0));
    expect(await importText(drawer, bytes)).toMatchObject({ rows: 3, added: 3, counted: 3, refused: 0 });
    expect(drawer.find("R 4k7")).toMatchObject({
      kind: "resistor", value: 4700, tolerance: 0.01, rating: 0.25, technology: "metal film", location: "Kästchen 3", quantity: 1200, currency: "EUR",
      prices: [{ from: 1, unitCost: 0.08 }, { from: 100, unitCost: 0.05 }], supplier: "Harbour", orderCode: "HC-1",
    });
    expect(drawer.find("C blue")).toMatchObject({ kind: "capacitor", value: 1e-7, tolerance: 0.05, rating: 63, quantity: 40, prices: [{ from: 1, unitCost: 0.14 }] });
    expect(drawer.find("Slider")).toMatchObject({ kind: "potentiometer", value: 50000, rating: 0.25, quantity: 12 });
  });

  test.each([
    ["tabs and a byte order mark", "\uFEFFid\tvalue\tqty\nC-1\t2n2\t5\n", { id: "C-1", kind: "capacitor", value: 2.2e-9, quantity: 5 }],
    ["units in the header", "id,Capacitance (nF),Tolerance (%),Voltage (V),qty\nC-1,100,5,63,7\n", { id: "C-1", kind: "capacitor", value: 1e-7, tolerance: 0.05, rating: 63, quantity: 7 }],
    ["per cent without a sign", "id,value,tolerance\nR-1,4k7,1\nR-2,47R,5\n", { id: "R-1", tolerance: 0.01 }],
    ["quotes, with a comma and a line break in them", 'id,value,notes\n"R-1",4k7,"said ""fine"", then\nleft"\n', { id: "R-1", notes: 'said "fine", then\nleft' }],
    ["signs of currency and breaks in one cell", "id,value,prices\nR-1,4k7,1:$0.10;100:$0.06\n", { prices: [{ from: 1, unitCost: 0.1 }, { from: 100, unitCost: 0.06 }], currency: "USD" }],
    ["breaks in the one column of prices", "id,value,Price\nR-1,4k7,1:0.10;100:€0.06\n", { prices: [{ from: 1, unitCost: 0.1 }, { from: 100, unitCost: 0.06 }], currency: "EUR" }],
    ["op amps in the column of values", "id,kind,value,package\nU-1,op amp,TL072,DIP-8\n", { id: "U-1", kind: "op-amp", type: "TL072", value: null, package: "DIP-8" }],
    ["letters for tolerances", "id,value,tol\nC-1,100n,K\n", { tolerance: 0.1 }],
    ["unlike tolerances", "id,value,tol\nC-1,100u,-20/+80%\n", { tolerance: 0.8 }],
    ["a temperature coefficient", "id,value,TCR (ppm/K)\nR-1,4k7,50\n", { temperatureCoefficient: 50e-6 }],
    ["letters beyond Latin", "id,value,location\nR-1,4k7,電阻 Ω 🎛\n", { location: "電阻 Ω 🎛" }],
    ["empty rows and rows of empty cells", "id,value\n\n,\nR-1,4k7\n,,\n", { id: "R-1", value: 4700 }],
    ["winding resistance with a unit of its own", "id,inductance (mH),DCR (kΩ)\nL-1,470,0.12\n", { id: "L-1", kind: "inductor", value: 0.47, windingR: 120 }],
    ["a header of one's own case", "ID,VALUE,In Stock\nR-1,4k7,3\n", { id: "R-1", quantity: 3 }],
    ["sixteen bits a letter", "UTF16:id\tvalue\nR-Ω\t4k7\n", { id: "R-Ω" }],
  ])("takes %s", async (_what, text, expected) => {
    const source = text.startsWith("UTF16:") ? new Uint8Array(Buffer.concat([Buffer.from([0xff, 0xfe]), Buffer.from(text.slice(6), "utf16le")])) : text;
    await importText(drawer, source);
    expect(drawer.allLines()[0]).toMatchObject(expected);
  });

  test("gives parts without a name one, the same every time", async () => {
    const table = "Kind,Value,Tolerance,Technology,Qty\nresistor,4k7,1%,metal film,10\nresistor,4k7,1%,metal film,20\ncapacitor,100n,5%,film,3\n";
    expect(await importText(drawer, table)).toMatchObject({ added: 3 });
    expect(drawer.allLines().map((line) => [line.id, line.quantity])).toEqual([["C-100n-FILM-5%", 3], ["R-4k7-METALFILM-1%", 10], ["R-4k7-METALFILM-1%-2", 20]]);
    expect(await importText(drawer, table)).toEqual({ step: null, rows: 3, added: 0, updated: 0, unchanged: 3, counted: 0, refused: 0, faults: [] });
  });

  test("updates the lines it knows, with a trace, and books what it counts differently", async () => {
    drawer.addLine(resistor("R-1", { location: "box 1", supplier: "Harbour" }), 10);
    drawer.addLine(resistor("R-2"), 5);
    const report = await importText(drawer, "id,value,location,qty\nR-1,4k7,box 2,14\nR-2,4k7,,5\n", { label: "Import shelf.csv", note: "import of shelf.csv" });
    expect(report).toMatchObject({ added: 0, updated: 1, unchanged: 1, counted: 1 });
    // The supplier is no column of the table, and stays.
    expect(drawer.line("R-1")).toMatchObject({ line: { location: "box 2", supplier: "Harbour", quantity: 14 }, history: [{ label: "Import shelf.csv", before: { location: "box 1" }, after: { location: "box 2" } }, {}] });
    expect(drawer.ledger({ line: "R-1", reference: null, before: null, limit: 1 }).movements[0]).toMatchObject({ kind: "counted", change: 4, note: "import of shelf.csv" });
    await drawer.undo(report.step ?? 0);
    expect(drawer.find("R-1")).toMatchObject({ location: "box 1", quantity: 10 });
  });

  test("is all or nothing, and says of each row what is wrong with it", async () => {
    drawer.addLine(resistor("R-held"), 5);
    drawer.move([{ line: "R-held", kind: "reserved", count: 4, reference: "Channel", note: "" }]);
    const table = ["id,kind,value,tolerance,qty", "R-1,resistor,4k7,1%,10", "R-2,resistor,much,1%,10", 'R-3,resistor,"a', 'b",1%,10', "R-4,valve,4k7,1%,10", "R-1,resistor,10k,1%,1", "R-5,resistor,4k7,500%,1", "R-6,resistor,4k7,1%,2.5", "R-held,resistor,4k7,1%,3", ",,4k7,,1", "R-7,resistor,,1%,1"].join("\n");
    expect(await refusal(table)).toEqual([
      "3: “much” is not understood: expected a value such as 4k7, 470, 4,7 kΩ or R47",
      expect.stringMatching(/^4: “a\nb” is not understood/),
      "6: “valve” is no kind of part: resistor, capacitor, inductor, potentiometer or op amp",
      "7: R-1 has been in row 2 already",
      "8: the tolerance must be from 0 to 100 %, got “500%”",
      "9: “2.5” is no number of pieces",
      "12: a resistor needs a value",
    ]);
    expect(drawer.info().lines).toBe(1);

    const report = await importText(drawer, table, { skipBadRows: true });
    expect(report).toMatchObject({ rows: 10, added: 2, refused: 8 });
    expect(report.faults.find((fault) => fault.row === 10)?.message).toContain("R-held: 3 counted, but 4 are spoken for, by Channel (4)");
    expect(drawer.find("R-held")).toMatchObject({ quantity: 5, reserved: 4, tolerance: 0.01 });
  });

  test("without --skip leaves nothing behind where only the drawer itself refuses a row", async () => {
    drawer.addLine(resistor("R-1"), 5);
    drawer.move([{ line: "R-1", kind: "reserved", count: 4, reference: "Channel", note: "" }]);
    expect(await refusal("id,value,qty\nR-0,1k,1\nR-1,4k7,3\n")).toEqual(["3: R-1: 3 counted, but 4 are spoken for, by Channel (4). Release some first."]);
    expect(drawer.find("R-0")).toBeNull();
  });

  test("names the row where a quote never closes", async () => {
    expect(await refusal('id,value\nR-1,4k7\nR-2,"4k7\nR-3,10k\n')).toEqual([expect.stringContaining("a quote is opened here and never closed")]);
  });

  test("takes no guess where a wrong one would go unnoticed: bare numbers may be ohms, picofarads or anything", async () => {
    expect(await refusal("id,value\nX-1,100\n")).toEqual(["2: it is not said what kind of part it is: a column of kinds, or values with their unit, would say it"]);
  });

  test("tries everything and keeps nothing in a dry run", async () => {
    expect(await importText(drawer, "id,value,qty\nR-1,4k7,3\nR-2,?,3\n", { dryRun: true })).toMatchObject({ step: null, added: 1, counted: 1, refused: 1, faults: [{ row: 3 }] });
    expect(drawer.info()).toMatchObject({ lines: 0 });
    expect(drawer.steps(5)).toEqual([]);
  });

  test("tells how far it is, and stops when asked, leaving nothing", async () => {
    const table = `id,value,qty\n${Array.from({ length: 3000 }, (_, n) => `R-${n},${n + 1}R,5`).join("\n")}\n`;
    const seen: string[] = [];
    await importText(drawer, table, { onProgress: ({ phase, done, total }) => seen.push(`${phase} ${done} of ${total}`) });
    expect(seen.filter((one) => one.startsWith("writing"))).toEqual([500, 1000, 1500, 2000, 2500, 3000].map((done) => `writing ${done} of 3000`));
    expect(seen[0]).toBe(`reading 0 of ${table.length}`);

    const other = await openScratch();
    let isWriting = false;
    await expect(importText(other, table, { onProgress: ({ phase }) => (isWriting = phase === "writing"), isCancelled: () => isWriting })).rejects.toMatchObject({ code: "import-cancelled" });
    await expect(importText(other, table, { isCancelled: () => true })).rejects.toMatchObject({ code: "import-cancelled" });
    expect(other.info()).toMatchObject({ lines: 0, retired: 0 });
    expect(other.addLine(resistor("R-1"), 1).step).toBe(1);
  });

  test("lets others read the state before it, while it writes", async () => {
    const table = `id,value,qty\n${Array.from({ length: 2000 }, (_, n) => `R-${n},${n + 1}R,5`).join("\n")}\n`;
    const seen = new Set<number>();
    await importText(drawer, table, { onProgress: ({ phase }) => phase === "writing" && seen.add(drawer.info().lines) });
    expect([...seen]).toEqual([0]);
    expect(drawer.info().lines).toBe(2000);
  });
});

describe("an export", () => {
  test("of the starter is the starter", async () => {
    await importText(drawer, STARTER);
    expect(drawer.info().lines).toBeGreaterThanOrEqual(400);
    expect(exportTable(drawer).text).toBe(STARTER);
  });

  test("of a version before windings were kept is read as one, op-amp types that are words and all", async () => {
    const [headers, ...rows] = "id,kind,value,type,tolerance,rating,technology,temperature coefficient,package,location,quantity,prices,currency,supplier,order code,notes,retired\nU-1,op-amp,,Precision,,,,,DIP-8,,3,,,,,,\nL-1,inductor,100m,,10%,,ferrite core,,pot core,coils,2,1:2.4,EUR,,,,yes\n".split("\n");
    expect(await importText(drawer, [headers, ...rows].join("\n"))).toMatchObject({ added: 2, refused: 0 });
    expect(drawer.find("U-1")).toMatchObject({ type: "Precision", quantity: 3 });
    expect(drawer.find("L-1")).toMatchObject({ value: 0.1, windingR: null, retired: true });
    // What a line has got since stays, since the table says nothing about it.
    drawer.editLines(["L-1"], { windingR: 38 });
    await importText(drawer, [headers, ...rows].join("\n"));
    expect(drawer.find("L-1")).toMatchObject({ windingR: 38 });
  });

  test("has no cell that a spreadsheet would take for a formula, and gives every text back as it was", async () => {
    const texts = ["=1+1", "+12 V rail", "-x", "@home", "'=quoted", "''=twice", "' =spaced", "'plain", "-", "a=b"];
    for (const [n, text] of texts.entries()) drawer.addLine(resistor(`${text} ${n}`, { notes: text, location: text, supplier: text }), 1);
    const { text } = exportTable(drawer);
    for (const record of text.trim().split("\n").slice(1)) for (const cell of record.split(",")) expect(cell).not.toMatch(/^[=+\-@]./);
    const other = await openScratch();
    await importText(other, text);
    expect(other.allLines()).toEqual(drawer.allLines());
  });

  test("guards a formula behind white space too, and a tab or a carriage return before anything", () => {
    const formulas = ["=1", "+1", "-1", "@a"].flatMap((text) => [text, ` ${text}`, `\u00a0${text}`, `\n ${text}`, `\t${text}`, `\r${text}`]);
    for (const text of [...formulas, "\tplain", "\rplain", "' =1", "'\tplain", "'' =1"]) {
      expect(guardFormula(text)).toBe(`'${text}`);
      expect(unguardFormula(guardFormula(text))).toBe(text);
    }
    for (const text of ["plain", " plain", "'plain", "' plain", "a\t=1", "-", " -", ""]) expect([guardFormula(text), unguardFormula(text)]).toEqual([text, text]);
    const piece = fc.constantFrom("'", " ", "\t", "\r", "\n", "\u00a0", "=", "+", "-", "@", "a");
    fc.assert(fc.property(fc.array(piece, { maxLength: 6 }).map((parts) => parts.join("")), (text) => {
      expect(guardFormula(text)).not.toMatch(/^(?:[\t\r]|\s*[=+\-@])./s);
      expect(unguardFormula(guardFormula(text))).toBe(text);
    }));
  });

  test("taken into an empty drawer gives the same export and the same lines, whatever the lines are", async () => {
    await fc.assert(
      fc.asyncProperty(fc.uniqueArray(anyLine(), { selector: (line) => line.id, minLength: 1, maxLength: 8 }), fc.array(fc.nat(1_000_000), { minLength: 8, maxLength: 8 }), fc.nat(7), async (lines, quantities, retired) => {
        await withScratch(async (first) => {
          lines.forEach((line, index) => first.addLine(line, quantities[index]));
          first.retireLines([lines[retired % lines.length].id], true);
          const { text } = exportTable(first);
          await withScratch(async (second) => {
            await importText(second, text);
            expect(exportTable(second).text).toBe(text);
            expect([...second.eachLine()]).toEqual([...first.eachLine()]);
            // And taken in once more it changes nothing.
            expect(await importText(second, text)).toMatchObject({ step: null, unchanged: lines.length });
          });
        });
      }),
      { numRuns: 30 },
    );
  });

  test("writes values as the trade does, and exactly where that would round", () => {
    drawer.addLine(capacitor("C-1", { value: 4.7e-8, tolerance: 0.025, rating: 63, temperatureCoefficient: -200e-6 }), 3);
    drawer.addLine(resistor("R-1", { value: 4700.000000001, tolerance: 1 / 3 }), 0);
    const rows = exportTable(drawer).text.split("\n").slice(1, 3).map((row) => row.split(",").slice(0, 8));
    expect(rows).toEqual([
      ["C-1", "capacitor", "47n", "", "2.5%", "63V", "film", "-200ppm"],
      ["R-1", "resistor", "4700.000000001", "", "0.3333333333333333", "0.25W", "metal film", ""],
    ]);
  });
});

test("a table is guessed by what it is, and read as one says", async () => {
  const { text, encoding } = decodeTable(new TextEncoder().encode("R-1|4k7\nR-2|10k\n"), null);
  const guessed = await openTable(text, encoding, null, null);
  expect(guessed.reading).toEqual({ delimiter: "|", encoding: "utf-8", hasHeader: true });
  const told = await openTable(text, encoding, { ...guessed.reading, hasHeader: false }, { columns: [{ column: 0, field: "id", unit: "", from: 1 }, { column: 1, field: "value", unit: "", from: 1 }], defaults: { kind: null, currency: "" } });
  expect(told.headers).toEqual(["Column 1", "Column 2"]);
  expect(told.sample.map((row) => [row.row, ...row.cells])).toEqual([[1, "R-1", "4k7"], [2, "R-2", "10k"]]);
});
