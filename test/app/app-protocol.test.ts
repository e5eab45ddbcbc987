import { mkdir, mkdtemp, rm, symlink, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { answerAppRequest, isAppUrl } from "../../app/app-protocol.ts";
import { SECURITY_HEADERS } from "../../app/headers.ts";
import { fileArgument, secondStartPath } from "../../app/open-requests.ts";
import { loadUiFiles, type UiFiles } from "../../app/ui-files.ts";

let base = "";
let ui: UiFiles;

beforeAll(async () => {
  base = await mkdtemp(join(tmpdir(), "bandwright-ui-"));
  await mkdir(join(base, "ui", "assets"), { recursive: true });
  await writeFile(join(base, "secret.json"), "{}");
  await writeFile(join(base, "ui", "index.html"), "<!doctype html>");
  await writeFile(join(base, "ui", "assets", "main.js"), "1");
  await writeFile(join(base, "ui", "assets", "font.woff2"), new Uint8Array([0, 255, 128]));
  // A link in the build is no file of the build.
  await symlink(join(base, "secret.json"), join(base, "ui", "linked.json"));
  ui = await loadUiFiles(join(base, "ui"));
});
afterAll(() => rm(base, { recursive: true, force: true }));

const get = (url: string): Response => answerAppRequest(ui, { url, method: "GET" });

function expectAllHeaders(response: Response): void {
  for (const [name, value] of Object.entries(SECURITY_HEADERS)) expect(response.headers.get(name), name).toBe(value);
}

describe("the desktop window's own scheme", () => {
  test.each([
    ["app://ui/", "text/html; charset=utf-8", "<!doctype html>"],
    ["app://ui/index.html?x#y", "text/html; charset=utf-8", "<!doctype html>"],
    ["app://ui/assets/main.js", "text/javascript; charset=utf-8", "1"],
  ])("%s is there, with its type and all headers", async (url, type, body) => {
    const response = get(url);
    expect([response.status, response.headers.get("Content-Type"), await response.text()]).toEqual([200, type, body]);
    expectAllHeaders(response);
  });

  test("bytes stay bytes", async () => {
    expect([...new Uint8Array(await get("app://ui/assets/font.woff2").arrayBuffer())]).toEqual([0, 255, 128]);
  });

  test.each([
    "app://ui/../secret.json",
    "app://ui/..%2fsecret.json",
    "app://ui/%2e%2e/secret.json",
    "app://ui/assets/..%5c..%5csecret.json",
    "app://ui//secret.json",
    "app://ui/linked.json",
    "app://ui/assets",
    "app://ui/assets/",
    "app://ui/none.js",
    "app://ui/%",
    "app://ui/index.html%00",
    "app://ui/__proto__",
  ])("%s is not", async (url) => {
    const response = get(url);
    expect([response.status, await response.text()]).toEqual([404, ""]);
    expectAllHeaders(response);
  });

  test.each(["app://other/index.html", "app://ui.evil.test/", "app://ui:80/", "https://ui/", "file:///index.html", "app:ui/", "not an address", ""])("%j is another's", (url) => {
    expect(isAppUrl(url)).toBe(false);
    const response = get(url);
    expect(response.status).toBe(403);
    expectAllHeaders(response);
  });

  test.each(["POST", "PUT", "HEAD", "OPTIONS"])("%s is not answered", (method) => {
    expect(answerAppRequest(ui, { url: "app://ui/", method }).status).toBe(405);
  });
});

describe("reading the built screens", () => {
  test("fails early where there is no page, or a file of no known type", async () => {
    const folder = await mkdtemp(join(base, "other-"));
    await expect(loadUiFiles(folder)).rejects.toThrow("index.html");
    await writeFile(join(folder, "index.html"), "");
    await writeFile(join(folder, "tool.exe"), "");
    await expect(loadUiFiles(folder)).rejects.toThrow("tool.exe");
  });
});

describe("the file among the arguments", () => {
  test.each<[string, string[], number, string | null]>([
    ["installed", ["/opt/bandwright", "a b.bandwright"], 1, "/boards/a b.bandwright"],
    ["from a checkout", ["/electron", "/checkout", "/x/ω.bandwright"], 2, "/x/ω.bandwright"],
    ["with switches before it", ["/electron", "/checkout", "--trace-warnings", "a.bandwright"], 2, "/boards/a.bandwright"],
    ["none", ["/electron", "/checkout"], 2, null],
    ["an empty one", ["/opt/bandwright", ""], 1, null],
  ])("%s", (_what, argv, skip, path) => {
    expect(fileArgument(argv, skip, "/boards")).toBe(path);
  });

  test.each<[unknown, string | null]>([
    [{ path: "/a" }, "/a"],
    [{ path: null }, null],
    [{ path: 3 }, null],
    [null, null],
    ["/a", null],
  ])("a second start that hands over %j", (data, path) => {
    expect(secondStartPath(data)).toBe(path);
  });
});
