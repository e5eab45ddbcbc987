import { execFile, spawn } from "node:child_process";
import { chmod, lstat, mkdir, mkdtemp, readdir, readFile, rm, stat, symlink, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { promisify } from "node:util";
import { afterEach, beforeEach, describe, expect, test } from "vitest";
import { writeWhole } from "../../../app/services/write-whole.ts";
import { asOrdinaryUser } from "../../helpers/ordinary-user.ts";

const helper = (name: string): string => fileURLToPath(new URL(`../../helpers/${name}`, import.meta.url));

let folder = "";
beforeEach(async () => {
  folder = await mkdtemp(join(tmpdir(), "bandwright-write-"));
});
afterEach(() => rm(folder, { recursive: true, force: true }));

describe("writing a file whole", () => {
  test("makes a new one, and nothing beside it", async () => {
    await writeWhole(join(folder, "a"), "größe\n");
    expect(await readFile(join(folder, "a"), "utf8")).toBe("größe\n");
    expect(await readdir(folder)).toEqual(["a"]);
  });

  test("keeps the mode of the one it replaces", async () => {
    const path = join(folder, "a");
    await writeFile(path, "old");
    await chmod(path, 0o640);
    await writeWhole(path, "new");
    expect((await stat(path)).mode & 0o777).toBe(0o640);
    expect(await readFile(path, "utf8")).toBe("new");
  });

  test("writes to the file behind a link, and the link stays one", async () => {
    await mkdir(join(folder, "elsewhere"));
    const file = join(folder, "elsewhere", "a");
    const link = join(folder, "link");
    await writeFile(file, "old");
    await symlink(file, link);
    await writeWhole(link, "new");
    expect((await lstat(link)).isSymbolicLink()).toBe(true);
    expect(await readFile(file, "utf8")).toBe("new");
    expect(await readdir(join(folder, "elsewhere"))).toEqual(["a"]);
  });

  test("never puts a file in the place of a pipe or a folder", async () => {
    const pipe = join(folder, "pipe");
    await promisify(execFile)("mkfifo", [pipe]);
    await mkdir(join(folder, "inner"));
    for (const path of [pipe, join(folder, "inner")]) await expect(writeWhole(path, "new")).rejects.toThrow("not an ordinary file");
    expect((await stat(pipe)).isFIFO()).toBe(true);
    expect((await readdir(folder)).toSorted()).toEqual(["inner", "pipe"]);
  });

  test("takes the longest name that the file system does", async () => {
    const path = join(folder, "n".repeat(255));
    await writeWhole(path, "x");
    expect(await readFile(path, "utf8")).toBe("x");
  });

  test("leaves the old file and no litter where it fails", async () => {
    const path = join(folder, "a");
    await writeFile(path, "old");
    await chmod(folder, 0o555);
    await expect(asOrdinaryUser(() => writeWhole(path, "new"))).rejects.toMatchObject({ code: "EACCES" });
    await chmod(folder, 0o755);
    expect(await readFile(path, "utf8")).toBe("old");
    expect(await readdir(folder)).toEqual(["a"]);
  });

  test("leaves the old file and no litter where there is room for half of the new one", async () => {
    const path = join(folder, "a");
    await writeFile(path, "old");
    // The shell limits files to 64 blocks of at least 512 bytes, as a full disk would.
    const { stdout } = await promisify(execFile)("sh", ["-c", 'ulimit -f 64; exec "$0" "$@"', process.execPath, helper("write-once.ts"), path, "1000000"]);
    expect(stdout.trim()).toBe("EFBIG");
    expect(await readFile(path, "utf8")).toBe("old");
    expect(await readdir(folder)).toEqual(["a"]);
  });

  test("is never seen half done, even by a crash", async () => {
    const path = join(folder, "a");
    const whole = new Set(["a".repeat(2_000_000), "b".repeat(2_000_000)]);
    for (const delay of [0, 3, 7, 12, 20]) {
      const child = spawn(process.execPath, [helper("write-for-ever.ts"), path], { stdio: ["ignore", "pipe", "inherit"] });
      const ended = new Promise((resolve) => {
        child.once("close", resolve);
      });
      await new Promise((resolve) => {
        child.stdout.once("data", resolve);
      });
      await new Promise((resolve) => {
        setTimeout(resolve, delay);
      });
      child.kill("SIGKILL");
      await ended;
      expect(whole.has(await readFile(path, "utf8"))).toBe(true);
    }
  });
});
