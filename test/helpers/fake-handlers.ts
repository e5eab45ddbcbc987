import type { Handlers } from "../../app/host.ts";
import type { Build, DrawerLine, ImportReport } from "../../core/contract/drawer-schemas.ts";
import { newProject } from "../../core/model/new-project.ts";

const FINGERPRINT = "0".repeat(64);

const LINE: DrawerLine = {
  id: "R-4K7", kind: "resistor", value: 4700, type: null, tolerance: 0.01, rating: 0.25, technology: "metal film", temperatureCoefficient: 50e-6, windingR: null, package: "", location: "box Ω", prices: [{ from: 1, unitCost: 0.05 }],
  currency: "EUR", supplier: "", orderCode: "", notes: "", quantity: 3, reserved: 1, retired: false,
};
const INFO = { path: "/drawer.sqlite", lines: 1, retired: 0, pieces: 0, version: 2 };
const REPORT: ImportReport = { step: 1, rows: 1, added: 1, updated: 0, unchanged: 0, counted: 1, refused: 0, faults: [] };
const BUILD: Build = { reference: "Channel", units: 1, unitsUsed: 0, state: "reserved", at: "2030-01-01T00:00:00.000Z", bill: [{ line: "R-4K7", count: 1, held: 1 }] };
const CHANGED = { step: 1, changed: 1 };

/** Handlers that answer everything with something valid; a test replaces those it is about. */
export function fakeHandlers(own: Partial<Handlers> = {}): Handlers {
  return {
    "host.capabilities": async () => ({ fileDialogs: "inPage", version: "1.2.3", platform: "test" }),
    "project.launch": async () => ({ path: null }),
    "project.demos": async () => ({ demos: [] }),
    "project.open": async ({ path }) => ({ path, writable: true, fingerprint: FINGERPRINT, project: newProject(), warnings: [] }),
    "project.save": async ({ path }) => ({ path, fingerprint: FINGERPRINT }),
    "project.chooseOpen": async () => ({ path: null }),
    "project.chooseSave": async () => ({ path: null, replace: false }),
    "files.list": async () => ({ folder: "/", parent: null, roots: [], entries: [], writable: false }),
    "drawer.open": async () => INFO,
    "drawer.info": async () => INFO,
    "drawer.lines": async () => ({ total: 1, lines: [LINE] }),
    "drawer.facets": async () => ({ kind: [{ value: "resistor", count: 1 }], technology: [{ value: "metal film", count: 1 }], package: [], supplier: [], location: [], tolerance: [{ value: null, count: 1 }] }),
    "drawer.values": async () => ({ values: [{ value: 4700, lines: 1, quantity: 3 }] }),
    "drawer.candidates": async () => ({ lines: [LINE] }),
    "drawer.line": async () => ({ line: LINE, holders: [{ reference: "Channel", count: 1 }], pieces: [], history: [{ step: 1, at: BUILD.at, label: "Add R-4K7", before: null, after: {} }] }),
    "drawer.addLine": async () => ({ step: 1, line: LINE }),
    "drawer.editLines": async () => CHANGED,
    "drawer.retireLines": async () => CHANGED,
    "drawer.move": async () => ({ step: 1, lines: [LINE] }),
    "drawer.ledger": async () => ({ movements: [{ id: 1, at: BUILD.at, line: "R-4K7", kind: "counted", change: -2, reference: "", note: "", step: 1, reverses: null }], hasMore: false }),
    "drawer.pieces": async () => ({ pieces: [{ id: 1, line: "R-4K7", mark: "a", value: 4712, frequency: null }] }),
    "drawer.putPieces": async () => ({ step: 1, pieces: [] }),
    "drawer.removePieces": async () => CHANGED,
    "drawer.importPreview": async () => ({ reading: { delimiter: ";", encoding: "utf-8", hasHeader: true }, mapping: { columns: [], defaults: { kind: null, currency: "" } }, headers: [], rows: [] }),
    "drawer.import": async () => REPORT,
    "drawer.cancelImport": async () => ({ cancelled: false }),
    "drawer.starter": async () => REPORT,
    "drawer.export": async () => ({ path: null, text: "id\n", lines: 0 }),
    "drawer.reserve": async () => ({ step: 1, build: BUILD }),
    "drawer.held": async () => ({ held: [{ line: "R-4K7", count: 1 }] }),
    "drawer.release": async () => ({ step: 1 }),
    "drawer.use": async () => ({ step: 1, build: BUILD }),
    "drawer.builds": async () => ({ builds: [BUILD] }),
    "drawer.undo": async () => ({ step: 2, label: "Undo: Add R-4K7" }),
    "drawer.steps": async () => ({ steps: [{ id: 1, at: BUILD.at, label: "Add R-4K7", undoes: null, undoneBy: null }] }),
    ...own,
  };
}
