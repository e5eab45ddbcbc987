/** Times the drawer with a hundred thousand lines in a real file. */
import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { decodeTable, openTable } from "../../app/services/csv-table.ts";
import { exportTable, importTable } from "../../app/services/drawer-tables.ts";
import { openDrawer } from "../../app/store/drawer-store.ts";
import { EVERY_LINE } from "../../core/contract/drawer-schemas.ts";

export interface DrawerBench {
  readonly what: string;
  readonly ms: number;
}

const LINES = 100_000;
const TECHNOLOGIES = { resistor: ["metal film", "carbon film"], capacitor: ["film", "C0G", "X7R", "electrolytic"], inductor: ["ferrite core"] } as const;

/** A big workshop's table: three kinds, five decades, two hundred places. */
function bigTable(): string {
  const rows = ["id,kind,value,tolerance,rating,technology,package,location,quantity,prices,currency,supplier,order code,notes"];
  for (let n = 0; n < LINES; n += 1) {
    const kind = n % 10 < 6 ? "resistor" : n % 10 < 9 ? "capacitor" : "inductor";
    const technologies = TECHNOLOGIES[kind];
    const digits = 10 + (Math.floor(n / 10) % 90);
    const decade = Math.floor(n / 900) % 5;
    const value = kind === "resistor" ? `${digits}e${decade}` : kind === "capacitor" ? `${digits}e${decade - 12}` : `${digits}e${decade - 6}`;
    rows.push(
      `${kind[0].toUpperCase()}-${n},${kind},${value},${[1, 2, 5, 10][n % 4]}%,${kind === "capacitor" ? `${[16, 25, 63, 100][n % 4]}V` : kind === "resistor" ? "0.25W" : ""},${technologies[n % technologies.length]},pitch ${(n % 8) * 2.5} mm,box ${n % 200},${n % 300},1:0.${10 + (n % 80)};100:0.0${5 + (n % 4)},EUR,Supplier ${n % 12},SC-${100_000 + n},taken from the shelf of ${1990 + (n % 35)}`,
    );
  }
  return `${rows.join("\n")}\n`;
}

/** Runs the drawer's benchmark. `median` times a call. */
export async function benchDrawer(median: (runs: number, warmUp: number, call: () => void) => number): Promise<readonly DrawerBench[]> {
  const folder = mkdtempSync(join(tmpdir(), "bandwright-bench-"));
  const results: DrawerBench[] = [];
  const once = async <T>(what: string, work: () => Promise<T> | T): Promise<T> => {
    const start = performance.now();
    const result = await work();
    results.push({ what, ms: performance.now() - start });
    return result;
  };
  const often = (what: string, work: () => void): void => void results.push({ what, ms: median(21, 3, work) });
  try {
    const path = join(folder, "drawer.sqlite");
    const opts = { path, now: () => new Date(0) };
    const bytes = new TextEncoder().encode(bigTable());
    const drawer = await openDrawer(opts);
    await once(`import ${LINES} lines from CSV`, async () => {
      const { text, encoding } = decodeTable(bytes, null);
      return importTable(drawer, await openTable(text, encoding, null, null), { job: "bench", label: "Import", note: "", skipBadRows: false, dryRun: false });
    });
    const { text: exported } = await once("export them to CSV", () => exportTable(drawer));
    await once("import that again, nothing to change", async () => importTable(drawer, await openTable(exported, "utf-8", null, null), { job: "bench", label: "Import", note: "", skipBadRows: false, dryRun: false }));
    drawer.close();
    const again = await once("open the drawer, checks included", () => openDrawer(opts));

    const candidates = (kind: "resistor" | "capacitor", value: number) => again.candidates({ kind, value, within: 0.05, type: null, technology: [], ratingFrom: null, toleranceTo: null, availableFrom: 1, limit: 20_000 });
    often(`candidates within 5 % (${candidates("resistor", 4700).length} lines)`, () => candidates("resistor", 4700));
    for (const by of ["id", "value", "technology", "unitCost", "available", "quantity", "notes"] as const) often(`first page of all, by ${by}`, () => again.lines(EVERY_LINE, { by, descending: false }, 0, 100));
    often("page in the middle, by value", () => again.lines(EVERY_LINE, { by: "value", descending: false }, LINES / 2, 100));
    for (const text of ["film", "supplier", "box 12", "4k7 metal", "1n 63V 2%", "sc-1234"]) {
      const page = (asked: string) => again.lines({ ...EVERY_LINE, text: asked }, { by: "value", descending: false }, 0, 100);
      const { total } = page(text);
      let turn = 0;
      // Now one more way to spell it, now another, so that nothing is remembered from the run before.
      often(`first page of “${text}” (${total} lines), looked up anew`, () => page(turn++ % 2 === 0 ? text : `${text} ${text.slice(0, 3)}`));
      often(`the page after it`, () => again.lines({ ...EVERY_LINE, text }, { by: "value", descending: false }, 100, 100));
    }
    often("facets of all", () => again.facets(EVERY_LINE));
    often("facets of “film”", () => again.facets({ ...EVERY_LINE, text: "film" }));
    often("one movement, on the disk", () => again.move([{ line: "R-1", kind: "bought", count: 1, reference: "", note: "" }]));
    again.close();
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
  return results;
}
