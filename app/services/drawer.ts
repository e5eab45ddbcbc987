import { mkdir, stat } from "node:fs/promises";
import { basename, dirname, extname } from "node:path";
import type { TableSource } from "../../core/contract/drawer-methods.ts";
import type { ImportReport } from "../../core/contract/drawer-schemas.ts";
import { HostFailure } from "../../core/contract/failures.ts";
import type { ArgsOf, EventData, EventName, MethodName, ResultOf } from "../../core/contract/methods.ts";
import { readRow } from "../../core/drawer/read-row.ts";
import type { ImportMapping, TableReading } from "../../core/drawer/mapping.ts";
import { openDrawer, type DrawerStore } from "../store/drawer-store.ts";
import { openTable, readTable, type Table } from "./csv-table.ts";
import { exportTable, importTable } from "./drawer-tables.ts";
import type { PathGuard } from "./path-guard.ts";
import { writeFailure } from "./system-error.ts";
import { writeWhole } from "./write-whole.ts";

export type DrawerMethod = Extract<MethodName, `drawer.${string}`>;
type DrawerHandlers = { readonly [M in DrawerMethod]: (args: ArgsOf<M>) => Promise<ResultOf<M>> };

/** What the drawer service works on. */
export interface DrawerOpts {
  readonly guard: PathGuard;
  /** The user's own drawer; made by the first call that needs it. */
  readonly drawerPath: string;
  /** The table of the starter drawer. */
  readonly starterPath: string;
  readonly now: () => Date;
  readonly emit: <E extends EventName>(name: E, data: EventData<E>) => void;
}

export interface Drawer {
  readonly handlers: DrawerHandlers;
  /** Closes the file; a later call opens it again. */
  readonly close: () => Promise<void>;
}

/** How often the drawer is looked at for what other programs have written, ms. */
const LOOK_EVERY = 1000;
const PREVIEW_ROWS = 20;
const TABLE_EXTENSIONS = [".csv", ".tsv", ".txt"];

/** Builds the drawer service. */
export function createDrawer({ guard, drawerPath, starterPath, now, emit }: DrawerOpts): Drawer {
  let path = drawerPath;
  let opened: Promise<DrawerStore> | null = null;
  let watch: NodeJS.Timeout | undefined;
  const jobs = new Set<string>();
  const cancelled = new Set<string>();

  function store(): Promise<DrawerStore> {
    if (opened === null) {
      const opening = openDrawer({ path, now });
      opened = opening;
      opening.then(
        (ready) => opened === opening && watchOthers(ready),
        // What was wrong may be mended meanwhile: the next call tries again.
        () => {
          if (opened === opening) opened = null;
        },
      );
    }
    return opened;
  }

  /** Tells the screens, too, of what another program books. */
  function watchOthers(ready: DrawerStore): void {
    clearInterval(watch);
    let seen = ready.foreignStamp();
    const look = (): void => {
      const stamp = ready.foreignStamp();
      if (stamp === seen) return;
      seen = stamp;
      emit("drawer.changed", { step: null });
    };
    watch = setInterval(() => {
      try {
        look();
      } catch {
        // The file has gone bad: the next call says so, to somebody who asked.
        clearInterval(watch);
      }
    }, LOOK_EVERY).unref();
  }

  async function close(): Promise<void> {
    clearInterval(watch);
    const closing = opened;
    opened = null;
    (await closing?.catch(() => null))?.close();
  }

  /** Tells the screens of a change that has gone well. */
  function told<T extends { readonly step: number | null }>(result: T): T {
    if (result.step !== null) emit("drawer.changed", { step: result.step });
    return result;
  }

  async function table(source: TableSource, reading: TableReading | null, mapping: ImportMapping | null): Promise<{ readonly table: Table; readonly name: string }> {
    if ("text" in source) return { table: await openTable(source.text, reading?.encoding ?? "utf-8", reading, mapping), name: "a table" };
    const file = await guard.resolve(source.path);
    const { text, encoding } = await readTable(file, reading?.encoding ?? null);
    return { table: await openTable(text, encoding, reading, mapping), name: basename(file) };
  }

  async function runImport(job: string, one: Table, name: string, opts: { readonly skipBadRows: boolean; readonly dryRun: boolean }): Promise<ImportReport> {
    if (jobs.has(job)) throw new HostFailure("drawer-refused", { problems: [`An import named ${job} is running already.`] });
    jobs.add(job);
    try {
      return told(
        await importTable(await store(), one, {
          job, ...opts,
          label: `Import ${name}`,
          note: `import of ${name}`,
          onProgress: (progress) => emit("drawer.importProgress", { job, ...progress }),
          isCancelled: () => cancelled.has(job),
        }),
      );
    } finally {
      jobs.delete(job);
      cancelled.delete(job);
    }
  }

  const handlers: DrawerHandlers = {
    "drawer.open": async ({ path: asked }) => {
      const wanted = asked === null ? drawerPath : await guard.resolve(asked);
      // Opened before the old one is let go: where it cannot be used, everything stays as it was.
      const next = await openDrawer({ path: wanted, now });
      await close();
      path = wanted;
      opened = Promise.resolve(next);
      watchOthers(next);
      emit("drawer.changed", { step: null });
      return next.info();
    },
    "drawer.info": async () => (await store()).info(),
    "drawer.lines": async ({ filter, sort, offset, limit }) => (await store()).lines(filter, sort, offset, limit),
    "drawer.facets": async ({ filter }) => (await store()).facets(filter),
    "drawer.values": async ({ filter }) => ({ values: (await store()).values(filter) }),
    "drawer.candidates": async (query) => ({ lines: (await store()).candidates(query) }),
    "drawer.line": async ({ id }) => (await store()).line(id),
    "drawer.addLine": async ({ line, quantity }) => told((await store()).addLine(line, quantity)),
    "drawer.editLines": async ({ ids, fields }) => told((await store()).editLines(ids, fields)),
    "drawer.retireLines": async ({ ids, retired }) => told((await store()).retireLines(ids, retired)),
    "drawer.move": async ({ moves }) => told((await store()).move(moves)),
    "drawer.ledger": async (query) => (await store()).ledger(query),
    "drawer.pieces": async ({ line }) => ({ pieces: (await store()).pieces(line) }),
    "drawer.putPieces": async ({ pieces }) => told((await store()).putPieces(pieces)),
    "drawer.removePieces": async ({ ids }) => told((await store()).removePieces(ids)),
    "drawer.importPreview": async ({ source, reading, mapping }) => {
      const { table: one } = await table(source, reading, mapping);
      const rows = one.sample.slice(0, PREVIEW_ROWS).map(({ row, cells }) => {
        const { line, quantity, problems } = readRow(cells, one.mapping);
        return { row, cells, line: problems.length === 0 ? line : null, quantity, problems };
      });
      return { reading: one.reading, mapping: one.mapping, headers: one.headers, rows };
    },
    "drawer.import": async ({ job, source, reading, mapping, ...opts }) => {
      const { table: one, name } = await table(source, reading, mapping);
      return runImport(job, one, name, opts);
    },
    "drawer.cancelImport": async ({ job }) => {
      if (jobs.has(job)) cancelled.add(job);
      return { cancelled: jobs.has(job) };
    },
    "drawer.starter": async ({ job }) => {
      const { text, encoding } = await readTable(starterPath, null);
      return runImport(job, await openTable(text, encoding, null, null), "the starter drawer", { skipBadRows: false, dryRun: false });
    },
    "drawer.export": async ({ path: asked, replace }) => {
      const { text, lines } = exportTable(await store());
      if (asked === null) return { path: null, text, lines };
      const file = await guard.resolve(TABLE_EXTENSIONS.includes(extname(asked).toLowerCase()) ? asked : `${asked}.csv`);
      await writeTable(await store(), file, text, replace);
      return { path: file, text: null, lines };
    },
    "drawer.reserve": async ({ reference, units, bill }) => told((await store()).reserve(reference, units, bill)),
    "drawer.release": async ({ reference }) => told((await store()).release(reference)),
    "drawer.use": async ({ reference, units, bill }) => told((await store()).use(reference, units, bill)),
    "drawer.held": async ({ reference }) => ({ held: [...(await store()).heldBy(reference)].map(([line, count]) => ({ line, count })) }),
    "drawer.builds": async () => ({ builds: (await store()).builds() }),
    "drawer.undo": async ({ step }) => told(await (await store()).undo(step)),
    "drawer.steps": async ({ limit }) => ({ steps: (await store()).steps(limit) }),
  };
  return { handlers, close };
}

/** Writes a table of the drawer whole. @throws HostFailure file-exists where a file is there and may not be replaced, as the drawer itself never may */
export async function writeTable({ path: drawerFile }: Pick<DrawerStore, "path">, path: string, text: string, replace: boolean): Promise<void> {
  const old = await stat(path).catch(() => null);
  const own = await stat(drawerFile).catch(() => null);
  if (old !== null && old.dev === own?.dev && old.ino === own.ino) throw new HostFailure("drawer-refused", { problems: [`${path} is the drawer itself: give the table another name.`] });
  if (old?.isDirectory() === true) throw new HostFailure("file-unwritable", { path, reason: "folder", detail: "" });
  if (old !== null && !replace) throw new HostFailure("file-exists", { path });
  try {
    await mkdir(dirname(path), { recursive: true });
    await writeWhole(path, text);
  } catch (error) {
    throw writeFailure(path, error);
  }
}
