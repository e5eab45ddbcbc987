import { copyFileSync, existsSync, mkdirSync, readdirSync, readFileSync, writeFileSync } from "node:fs";
import { dirname, join } from "node:path";
import Database from "better-sqlite3";
import { beforeEach, describe, expect, test, vi } from "vitest";
import { isHostFailure } from "../../core/contract/failures.ts";
import { openDrawer } from "../../app/store/drawer-store.ts";
import { asOrdinaryUser } from "../helpers/ordinary-user.ts";
import { importText, openScratch, resistor, scratchFolder } from "../helpers/drawer.ts";

// Real files, flushed: a busy disk takes its time.
vi.setConfig({ testTimeout: 30_000 });

const STARTER = readFileSync(new URL("../../assets/drawer/starter.csv", import.meta.url));
const PAGE = 4096;

let path = "";
beforeEach(async () => {
  path = join(scratchFolder(), "my drawer.sqlite");
});

async function soundBytes(): Promise<Buffer> {
  const store = await openScratch(join(scratchFolder(), "sound.sqlite"));
  await importText(store, STARTER);
  store.close();
  return readFileSync(store.path);
}

async function refusal() {
  const error: unknown = await openDrawer({ path, now: () => new Date(0) }).catch((caught: unknown) => caught);
  if (!isHostFailure(error, "drawer-unusable")) throw new Error(`not refused: ${String(error)}`);
  return error;
}

/** Every third byte of a page turned over. */
function withPage(bytes: Buffer, number: number): Buffer {
  const damaged = Buffer.from(bytes);
  for (let at = number * PAGE; at < (number + 1) * PAGE; at += 3) damaged[at] = damaged[at] ^ 0xff;
  return damaged;
}

function withBytes(bytes: Buffer, at: number, other: Buffer): Buffer {
  return Buffer.concat([bytes.subarray(0, at), other, bytes.subarray(at + other.length)]);
}

const DAMAGE: Readonly<Record<string, { readonly reason: string; readonly bytes: (sound: Buffer) => Buffer }>> = {
  "cut short by half": { reason: "damaged", bytes: (sound) => sound.subarray(0, Math.floor(sound.length / 2 / PAGE) * PAGE) },
  "cut short in the middle of a page": { reason: "damaged", bytes: (sound) => sound.subarray(0, 3 * PAGE + 1000) },
  "cut short in its header": { reason: "damaged", bytes: (sound) => sound.subarray(0, 50) },
  "with its schema's page turned over": { reason: "damaged", bytes: (sound) => Buffer.concat([sound.subarray(0, 100), withPage(sound, 0).subarray(100)]) },
  "with a page in the middle turned over": { reason: "damaged", bytes: (sound) => withPage(sound, Math.floor(sound.length / PAGE / 2)) },
  "with a page of zeros": { reason: "damaged", bytes: (sound) => Buffer.concat([sound.subarray(0, 5 * PAGE), Buffer.alloc(PAGE), sound.subarray(6 * PAGE)]) },
  // The header itself, in part and whole.
  "with its first bytes lost": { reason: "damaged", bytes: (sound) => withBytes(sound, 0, Buffer.from("lost and gone forever")) },
  "with its mark lost": { reason: "damaged", bytes: (sound) => withBytes(sound, 68, Buffer.alloc(4)) },
  "with another mark than its own": { reason: "damaged", bytes: (sound) => withBytes(sound, 68, Buffer.from("Xxxx")) },
  "with its whole header lost": { reason: "damaged", bytes: (sound) => withBytes(sound, 0, Buffer.alloc(100)) },
  "with its whole first page lost": { reason: "damaged", bytes: (sound) => withBytes(sound, 0, Buffer.alloc(PAGE, "\n")) },
  "with a page size that no database has": { reason: "damaged", bytes: (sound) => withBytes(sound, 16, Buffer.from([3, 3])) },
};

describe.each(Object.entries(DAMAGE))("a drawer %s", (_name, { reason, bytes }) => {
  test("is told of, copied once, and left as it was", async () => {
    const damaged = bytes(await soundBytes());
    writeFileSync(path, damaged);
    const error = await refusal();
    expect(error.data.reason).toBe(reason);
    const copy = error.data.backup;
    if (copy === null) throw new Error("no copy was made");
    expect(copy).toMatch(/my drawer\.damaged-[0-9a-f]{8}\.sqlite$/);
    expect(error.message).toContain(copy);
    expect(readFileSync(copy).equals(damaged)).toBe(true);
    expect(readFileSync(path).equals(damaged)).toBe(true);

    expect((await refusal()).data.backup).toBe(copy);
    expect(readdirSync(dirname(path)).filter((name) => name.includes("damaged") && name.endsWith(".sqlite"))).toHaveLength(1);
    expect(readFileSync(path).equals(damaged)).toBe(true);
  });
});

test("any page but the free ones, turned over, is noticed or harms nothing", async () => {
  const sound = await soundBytes();
  const pages = Math.floor(sound.length / PAGE);
  let noticed = 0;
  for (let number = 1; number < pages; number += Math.ceil(pages / 12)) {
    writeFileSync(path, withPage(sound, number));
    const outcome = await openDrawer({ path, now: () => new Date(0) }).then(
      (store) => (store.close(), "opened"),
      (error: unknown) => (isHostFailure(error, "drawer-unusable") ? error.data.reason : String(error)),
    );
    expect(["opened", "damaged"]).toContain(outcome);
    if (outcome === "damaged") noticed += 1;
    else writeFileSync(path, sound);
  }
  expect(noticed).toBeGreaterThan(5);
});

/** A database of another program, with a table of its own. */
function recipes(own: (db: Database.Database) => void): () => Buffer {
  return () => {
    const file = join(scratchFolder(), "recipes.db");
    const db = new Database(file);
    db.exec("CREATE TABLE recipes (name TEXT)");
    own(db);
    db.close();
    return readFileSync(file);
  };
}

const NEVER_A_DRAWER: Readonly<Record<string, () => Buffer>> = {
  "a text": () => Buffer.from("id,kind,value\nR-1,resistor,4k7\n".repeat(10)),
  "a short text": () => Buffer.from("hello"),
  "a text about drawers": () => readFileSync(new URL("../../app/store/migrations/0001-lines-and-ledger.sql", import.meta.url)),
  "a picture": () => Buffer.from([0x89, 0x50, 0x4e, 0x47, 0x0d, 0x0a, 0x1a, 0x0a, ...Array.from({ length: 5000 }, (_, i) => (i * 7) & 0xff)]),
  "zeros": () => Buffer.alloc(3 * PAGE),
  "another program's database": recipes(() => undefined),
  "another program's database with a log": recipes((db) => db.pragma("journal_mode = WAL")),
  "another program's database with a mark of its own": recipes((db) => db.pragma("application_id = 77")),
  "another program's database, damaged": () => withPage(recipes((db) => db.exec("INSERT INTO recipes SELECT hex(randomblob(500)) FROM (VALUES (1), (2), (3), (4), (5), (6), (7), (8), (9), (10), (11), (12))"))(), 1),
};

test.each(Object.entries(NEVER_A_DRAWER))("%s is refused, not touched, and nothing is put beside it", async (_name, bytes) => {
  const before = bytes();
  writeFileSync(path, before);
  const error = await refusal();
  expect(error.data).toMatchObject({ reason: "not-a-drawer", backup: null });
  expect(error.message).toMatch(/is not a drawer \(.+\)\. It was left as it is\.$/);
  expect(readFileSync(path).equals(before)).toBe(true);
  expect(readdirSync(dirname(path))).toEqual(["my drawer.sqlite"]);
});

test("a newer drawer is refused with nothing put beside it", async () => {
  const bytes = await soundBytes();
  bytes.writeUInt32BE(99, 60);
  writeFileSync(path, bytes);
  expect((await refusal()).data).toMatchObject({ reason: "newer", fileVersion: 99, backup: null });
  expect(readdirSync(dirname(path))).toEqual(["my drawer.sqlite"]);
});

test("an empty database, and a drawer of which only the log has been written, are drawers", async () => {
  const empty = new Database(path);
  empty.exec("CREATE TABLE gone (x); DROP TABLE gone; VACUUM");
  empty.close();
  const first = await openScratch(path);
  first.addLine(resistor("R-1"), 3);
  // As a kill leaves them: the file as it was before, everything else in the log.
  const killed = join(scratchFolder(), "killed.sqlite");
  copyFileSync(path, killed);
  copyFileSync(`${path}-wal`, `${killed}-wal`);
  expect(readFileSync(killed).toString("latin1", 68, 72)).not.toBe("BwDr");
  const again = await openScratch(killed);
  expect(again.find("R-1")?.quantity).toBe(3);
});

test("a folder of that name is refused", async () => {
  mkdirSync(path);
  expect((await refusal()).data.reason).toBe("not-a-drawer");
});

test("an empty file is a drawer that was never begun", async () => {
  writeFileSync(path, "");
  const store = await openScratch(path);
  expect(store.info().lines).toBe(0);
});

test("a file that may not be read says so", async () => {
  const store = await openScratch(path);
  store.close();
  await asOrdinaryUser(async () => {
    expect((await refusal()).data.reason).toBe("permission");
  });
  expect(existsSync(path)).toBe(true);
});

test("damage that is met later is told of too, and copied", async () => {
  const sound = await soundBytes();
  writeFileSync(path, sound);
  const store = await openScratch(path);
  expect(store.info().lines).toBe(429);
  store.close();
  const again = await openScratch(path);
  // Behind its back, all but the schema.
  const damaged = Buffer.from(sound);
  for (let at = PAGE; at < damaged.length; at += 1) damaged[at] = damaged[at] ^ 0xff;
  writeFileSync(path, damaged);
  let error: unknown;
  try {
    again.allLines();
  } catch (caught) {
    error = caught;
  }
  if (!isHostFailure(error, "drawer-unusable")) throw new Error(`not refused: ${String(error)}`);
  expect(error.data.reason).toBe("damaged");
  expect(readFileSync(error.data.backup ?? "").equals(damaged)).toBe(true);
});
