import { mkdtemp, rm, stat } from "node:fs/promises";
import { createServer, type Server } from "node:http";
import type { AddressInfo } from "node:net";
import { tmpdir } from "node:os";
import { dirname, join } from "node:path";
import { pathToFileURL } from "node:url";
import type { Browser, Page } from "playwright-core";
import { afterAll, afterEach, beforeAll, beforeEach, expect, test } from "vitest";
import { writeStartPage } from "../../../app/loopback-shell.ts";
import { startApp, type RunningApp } from "../../helpers/app.ts";
import { launchBrowser } from "../../helpers/browser.ts";

const USED = "This address has been used already";

let browser: Browser;
let app: RunningApp;
beforeAll(async () => {
  browser = await launchBrowser({ args: ["--host-resolver-rules=MAP *.test 127.0.0.1"] });
});
afterAll(() => browser.close());
beforeEach(async () => {
  app = await startApp();
});
afterEach(() => app.stop());

/** A new browser profile's page, and whatever it complained of. */
async function newPage(): Promise<{ page: Page; complaints: string[] }> {
  const page = await (await browser.newContext()).newPage();
  const complaints: string[] = [];
  page.on("pageerror", (error) => complaints.push(error.message));
  page.on("console", (message) => {
    if (message.type() === "error" || /content security policy/i.test(message.text())) complaints.push(message.text());
  });
  return { page, complaints };
}

/** Goes somewhere that ends at the program's page, and waits until that has been answered a call. */
async function openConnected(page: Page, url: string): Promise<void> {
  const answered = page.waitForResponse((response) => response.url().endsWith("/api/call") && response.ok());
  await page.goto(url);
  await answered;
}

test("the page connects, within its content policy, and forgets the code", async () => {
  const { page, complaints } = await newPage();
  await openConnected(page, app.url);
  await page.waitForTimeout(500);
  expect(page.url()).toBe(`${app.origin}/`);
  expect(await page.evaluate("history.length")).toBeLessThanOrEqual(2);
  expect(complaints).toEqual([]);
  expect(await page.context().cookies()).toEqual([]);
  expect(await page.evaluate("Object.keys(sessionStorage).join()")).toBe("bandwright-token");
  await page.context().close();
});

test("a reload keeps the session", async () => {
  const { page, complaints } = await newPage();
  await openConnected(page, app.url);
  await openConnected(page, `${app.origin}/`);
  expect(complaints).toEqual([]);
  expect(await page.getByText(USED).count()).toBe(0);
  await page.context().close();
});

test("the address opened a second time says what to do", async () => {
  const first = await newPage();
  await openConnected(first.page, app.url);
  for (const url of [app.url, app.origin]) {
    const { page } = await newPage();
    await page.goto(url);
    await page.getByText(USED).waitFor();
    await page.context().close();
  }
  await first.page.context().close();
});

test("the start page leads there, and only its user can read it", async () => {
  const dist = await mkdtemp(join(tmpdir(), "bandwright-dist-"));
  const { path, folder } = await writeStartPage(dist, app.url);
  expect((await stat(path)).mode & 0o777).toBe(0o600);
  expect((await stat(folder)).mode & 0o777).toBe(0o700);
  expect(dirname(path)).toBe(folder);
  const { page, complaints } = await newPage();
  await openConnected(page, pathToFileURL(path).href);
  await expect.poll(() => page.url()).toBe(`${app.origin}/`);
  expect(complaints).toEqual([]);
  await page.context().close();
  await rm(dist, { recursive: true });
});

test("another page in the same browser gets nothing, under its own name or a borrowed one", async () => {
  const user = await newPage();
  await openConnected(user.page, app.url);

  const server: Server = createServer((_request, response) => response.end("<!doctype html><title>elsewhere</title>"));
  await new Promise<void>((resolve) => {
    server.listen(0, "127.0.0.1", resolve);
  });
  const otherPort = (server.address() as AddressInfo).port;
  const ourPort = new URL(app.origin).port;
  for (const host of ["127.0.0.1", "localhost", "evil.test"]) {
    const page = await user.page.context().newPage();
    await page.goto(`http://${host}:${otherPort}/`);
    // Tries all that a page can: reading, posting, a frame, a script.
    const outcomes = await page.evaluate(async ([origin, borrowed]) => {
      const attempt = async (url: string, init: RequestInit): Promise<string> => {
        try {
          const response = await fetch(url, init);
          return response.type === "opaque" ? "opaque" : `read ${(await response.text()).length}`;
        } catch {
          return "refused";
        }
      };
      const load = (tag: "script" | "img", url: string): Promise<string> =>
        new Promise((resolve) => {
          const element = document.createElement(tag);
          element.onload = () => resolve("loaded");
          element.onerror = () => resolve("refused");
          element.src = url;
          document.body.append(element);
        });
      const call = JSON.stringify({ kind: "call", id: 1, method: "project.launch", args: {} });
      return [
        await attempt(`${origin}/`, {}),
        await attempt(`${origin}/api/call`, { method: "POST", headers: { "Content-Type": "application/json" }, body: call }),
        await attempt(`${borrowed}/`, {}),
        await load("script", `${origin}/index.html`),
        await load("img", `${origin}/index.html`),
      ];
    }, [app.origin, `http://evil.test:${ourPort}`]);
    expect(outcomes, host).toEqual(["refused", "refused", "refused", "refused", "refused"]);
    await page.close();
  }

  // The borrowed name, opened as a page of its own: same origin as its server, which is us, so that only Host tells.
  const page = await user.page.context().newPage();
  const response = await page.goto(`http://evil.test:${ourPort}/`);
  expect(response?.status()).toBe(421);
  await page.close();

  await user.page.context().close();
  server.closeAllConnections();
  await new Promise((resolve) => {
    server.close(resolve);
  });
});

test("the page can tell that the program has ended", async () => {
  const { page } = await newPage();
  await openConnected(page, app.url);
  // The long response for events is how: it ends with the program, and ends properly.
  const pieces = page.evaluate(async () => {
    const headers = { "Content-Type": "application/json", Authorization: `Bearer ${sessionStorage.getItem("bandwright-token")}` };
    const { body } = await fetch("/api/events", { method: "POST", headers, body: "{}" });
    document.title = "listening";
    // An answer that is not refused has a body.
    const reader = body!.getReader();
    let count = 0;
    while (!(await reader.read()).done) count += 1;
    return count;
  });
  await page.waitForFunction(() => document.title === "listening");
  expect(await app.stop()).toBe(0);
  expect(await pieces).toBe(1);
  await page.context().close();
});
