import { createStore, type StoreApi } from "zustand/vanilla";
import { EVERY_LINE, type DrawerStep, type Facets, type ImportReport, type LineFields, type LineFilter, type LineSort, type Move, type OwnedValue, type PutPiece } from "../../core/contract/drawer-schemas.ts";
import { HostFailure, isHostFailure, type FailureData } from "../../core/contract/failures.ts";
import type { ResultOf } from "../../core/contract/methods.ts";
import type { StockKind, StockLine } from "../../core/drawer/stock.ts";
import type { Ui } from "../editor/ui.ts";
import type { HostClient } from "../host/client.ts";
import { counted } from "./line-text.ts";
import { ALL_CHOSEN, chosenCount, chosenIds, NOTHING_CHOSEN, type Chosen } from "./selection.ts";
import { stepLabel, wayOf } from "./steps.ts";
import { LineWindows } from "./windows.ts";

export type DrawerInfo = ResultOf<"drawer.info">;

/** The kinds that have a value axis. */
export type AxisKind = "resistor" | "capacitor" | "inductor";

/** The cell in hand. */
export interface Place {
  readonly row: number;
  readonly column: number;
}

export interface DrawerState {
  readonly info: DrawerInfo | null;
  /** Why the drawer cannot be used. */
  readonly unusable: { readonly message: string; readonly data: FailureData<"drawer-unusable"> | null } | null;
  readonly filter: LineFilter;
  readonly sort: LineSort;
  /** Goes up whenever the windows hold something else. */
  readonly seen: number;
  readonly total: number | null;
  /** What is shown belongs to the filter before. */
  readonly isLooking: boolean;
  readonly facets: Facets | null;
  readonly axisKind: AxisKind;
  readonly values: readonly OwnedValue[];
  readonly chosen: Chosen;
  readonly at: Place;
  readonly steps: readonly DrawerStep[];
}

/** The drawer as the screen knows it: what is shown of it, and the commands that change it. */
export interface Drawer {
  readonly store: StoreApi<DrawerState>;
  readonly windows: LineWindows;
  readonly host: HostClient;
  /** Reads it when it is first needed; again after a failure. */
  open(): void;
  setFilter(change: Partial<LineFilter>): void;
  setSort(sort: LineSort): void;
  setAxisKind(kind: AxisKind): void;
  choose(chosen: Chosen): void;
  /** Chooses the lines from one place to another, those not fetched yet too. */
  chooseRange(from: number, to: number): Promise<void>;
  chooseAll(): void;
  setPlace(place: Place): void;
  /** Ids of the chosen lines; the line in hand where none is chosen. */
  chosenIds(): Promise<string[]>;
  /** How many lines a command about the chosen ones would take. */
  chosenCount(): number;
  lineInHand(): ReturnType<LineWindows["at"]>;
  /** These reject with a `HostFailure` where the drawer refuses. */
  addLine(line: StockLine, quantity: number): Promise<void>;
  editLines(ids: readonly string[], fields: LineFields): Promise<number>;
  retireLines(ids: readonly string[], retired: boolean): Promise<void>;
  move(moves: readonly Move[]): Promise<void>;
  putPieces(pieces: readonly PutPiece[]): Promise<void>;
  removePieces(ids: readonly number[]): Promise<void>;
  starter(): Promise<ImportReport>;
  /** What Ctrl+Z would take back in the drawer, in words; null where there is nothing. */
  undoLabel(): string | null;
  redoLabel(): string | null;
  undo(): Promise<void>;
  redo(): Promise<void>;
}

const STEPS_KEPT = 100;
const AXIS_KINDS: readonly StockKind[] = ["resistor", "capacitor", "inductor"];
const PAUSE = 120;
/** From here on a change takes long enough to be told of before it is done. */
const MANY = 1000;

function isAxisKind(kind: StockKind | undefined): kind is AxisKind {
  return kind !== undefined && AXIS_KINDS.includes(kind);
}

/** Builds the drawer's state over a connection. */
export function createDrawer(host: HostClient, ui: Pick<Ui, "notify">): Drawer {
  const store = createStore<DrawerState>(() => ({
    info: null, unusable: null, filter: EVERY_LINE, sort: { by: "value", descending: false }, seen: 0, total: null, isLooking: false, facets: null, axisKind: "resistor", values: [],
    chosen: NOTHING_CHOSEN, at: { row: 0, column: 0 }, steps: [],
  }));
  const { getState: state } = store;
  const windows = new LineWindows(
    (offset, limit) => host.call("drawer.lines", { filter: state().filter, sort: state().sort, offset, limit }),
    () => store.setState(({ seen, at }) => ({ seen: seen + 1, total: windows.total, isLooking: false, at: { ...at, row: Math.min(at.row, Math.max(0, (windows.total ?? 1) - 1)) } })),
    fail,
  );

  function fail(error: unknown): void {
    // The banner already says that the connection has ended.
    if (isHostFailure(error, "closed")) return;
    const message = error instanceof Error ? error.message : String(error);
    if (isHostFailure(error, "drawer-unusable")) store.setState({ unusable: { message, data: error.data } });
    else if (state().info === null) store.setState({ unusable: { message, data: null } });
    else ui.notify(message, true);
  }

  /** Only the latest of several answers counts. */
  const latest = new Map<string, number>();
  async function follow<T>(name: string, ask: () => Promise<T>, take: (answer: T) => void): Promise<void> {
    const turn = (latest.get(name) ?? 0) + 1;
    latest.set(name, turn);
    try {
      const answer = await ask();
      if (latest.get(name) === turn) take(answer);
    } catch (error) {
      if (latest.get(name) === turn) fail(error);
    }
  }

  function readInfo(): void {
    void follow("info", () => host.call("drawer.info"), (info) => store.setState({ info, unusable: null }));
    void follow("steps", () => host.call("drawer.steps", { limit: STEPS_KEPT }), ({ steps }) => store.setState({ steps }));
  }

  function readCounts(): void {
    void follow("facets", () => host.call("drawer.facets", { filter: state().filter }), (facets) => store.setState({ facets }));
    const { axisKind, filter } = state();
    // Gaps are gaps in what one owns: the range that a click on the axis sets does not narrow the axis itself.
    const wanted = { ...filter, kind: [axisKind], valueFrom: null, valueTo: null };
    void follow("values", () => host.call("drawer.values", { filter: wanted }), ({ values }) => store.setState({ values }));
  }

  let pause: ReturnType<typeof setTimeout> | undefined;
  function readCountsSoon(): void {
    clearTimeout(pause);
    pause = setTimeout(readCounts, PAUSE);
  }

  /** A burst of changes is looked at once. */
  function refresh(): void {
    if (state().info === null && state().unusable === null) return;
    windows.refresh();
    // Of an empty list nothing can stay on the screen meanwhile.
    store.setState(({ seen, total }) => ({ seen: seen + 1, isLooking: total === 0 }));
    readInfo();
    readCountsSoon();
  }

  function restart(change: Partial<DrawerState>): void {
    store.setState({ ...change, isLooking: true, chosen: NOTHING_CHOSEN, at: { row: 0, column: state().at.column } });
    windows.restart();
    windows.want(0, 0);
    readCountsSoon();
  }

  host.on("drawer.changed", refresh);

  const way = (): ReturnType<typeof wayOf> => wayOf(state().steps);
  async function travel(step: DrawerStep | null, word: "Undone" | "Done again"): Promise<void> {
    if (step === null) return;
    const label = stepLabel(step, state().steps);
    ui.notify(`${word === "Undone" ? "Undoing" : "Doing again"} in the drawer: ${label}…`);
    await host.call("drawer.undo", { step: step.id });
    ui.notify(`${word} in the drawer: ${label}.`);
    refresh();
  }

  const drawer: Drawer = {
    store,
    windows,
    host,
    open() {
      if (state().info !== null && state().unusable === null) return;
      store.setState({ unusable: null });
      readInfo();
      windows.refresh();
      windows.want(0, 0);
      readCounts();
    },
    setFilter(change) {
      const filter = { ...state().filter, ...change };
      const only = filter.kind.length === 1 ? filter.kind[0] : undefined;
      restart({ filter, ...(isAxisKind(only) ? { axisKind: only } : {}) });
    },
    setSort: (sort) => restart({ sort }),
    setAxisKind(axisKind) {
      store.setState({ axisKind, values: [] });
      readCounts();
    },
    choose: (chosen) => store.setState({ chosen }),
    async chooseRange(from, to) {
      const [first, last] = [Math.max(0, Math.min(from, to)), Math.max(from, to)];
      const { filter, sort } = state();
      const ids: string[] = [];
      for (let row = first; row <= last; row++) {
        const line = windows.at(row);
        if (line) ids.push(line.id);
        else {
          const { lines } = await host.call("drawer.lines", { filter, sort, offset: row, limit: Math.min(1000, last - row + 1) });
          ids.push(...lines.map((one) => one.id));
          row += lines.length - 1;
          if (lines.length === 0) break;
        }
      }
      store.setState({ chosen: { mode: "some", ids: new Set(ids) } });
    },
    chooseAll: () => store.setState({ chosen: ALL_CHOSEN }),
    setPlace: (at) => store.setState({ at }),
    chosenIds() {
      const { chosen, filter, sort } = state();
      const inHand = drawer.lineInHand();
      if (drawer.chosenCount() === 1 && chosen.mode === "some" && chosen.ids.size === 0) return Promise.resolve(inHand ? [inHand.id] : []);
      return chosenIds(chosen, (offset, limit) => host.call("drawer.lines", { filter, sort, offset, limit }));
    },
    chosenCount() {
      const count = chosenCount(state().chosen, state().total ?? 0);
      return count > 0 || !drawer.lineInHand() ? count : 1;
    },
    lineInHand: () => windows.at(state().at.row),
    async addLine(line, quantity) {
      await host.call("drawer.addLine", { line, quantity });
      ui.notify(`Added ${line.id}.`);
      refresh();
    },
    async editLines(ids, fields) {
      if (ids.length > MANY) ui.notify(`Changing ${counted(ids.length, "line")}…`);
      const { changed } = await host.call("drawer.editLines", { ids: [...ids], fields });
      ui.notify(changed === 0 ? "Nothing had to be changed." : changed === 1 && ids.length === 1 ? `Changed ${ids[0]}.` : `Changed ${counted(changed, "line")}.`);
      refresh();
      return changed;
    },
    async retireLines(ids, retired) {
      const { changed } = await host.call("drawer.retireLines", { ids: [...ids], retired });
      ui.notify(`${counted(changed, "line")} taken ${retired ? "out of use" : "back into use"}.`);
      store.setState({ chosen: NOTHING_CHOSEN });
      refresh();
    },
    async move(moves) {
      await host.call("drawer.move", { moves: [...moves] });
      ui.notify(`Booked ${moves.length === 1 ? `${moves[0].kind} ${moves[0].count} of ${moves[0].line}` : counted(moves.length, "movement")}.`);
      refresh();
    },
    async putPieces(pieces) {
      await host.call("drawer.putPieces", { pieces: [...pieces] });
      ui.notify(`Kept ${counted(pieces.length, "measured value")}.`);
      refresh();
    },
    async removePieces(ids) {
      await host.call("drawer.removePieces", { ids: [...ids] });
      ui.notify(`Removed ${counted(ids.length, "measured value")}.`);
      refresh();
    },
    async starter() {
      const report = await host.call("drawer.starter", { job: "starter" });
      ui.notify(`The starter drawer has ${counted(report.added, "line")}.`);
      refresh();
      return report;
    },
    undoLabel: () => labelOf(way().undo),
    redoLabel: () => labelOf(way().redo),
    undo: () => travel(way().undo, "Undone"),
    redo: () => travel(way().redo, "Done again"),
  };

  function labelOf(step: DrawerStep | null): string | null {
    return step === null ? null : stepLabel(step, state().steps);
  }

  return drawer;
}

/** A failure as the person at the screen reads it. */
export function reasonOf(error: unknown): string {
  return error instanceof HostFailure || error instanceof Error ? error.message : String(error);
}
