import { mkdir, mkdtemp, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import type { Browser, Locator, Page } from "playwright-core";
import { expect } from "vitest";
import { CHECKOUT, startApp, type RunningApp } from "../helpers/app.ts";

export const DEMO = join(CHECKOUT, "assets", "demo", "saltmarsh-voice-channel.bandwright");

export interface SessionOpts {
  /** Named at the start, as on the command line. */
  readonly file?: string;
  /** Files in the user's projects folder before it starts, by name. */
  readonly projects?: Readonly<Record<string, string>>;
  readonly size?: { readonly width: number; readonly height: number };
  /** Every frame comes late, as on a machine that has other work: nothing typed meanwhile may be lost. */
  readonly lateFrames?: boolean;
}

const LATE_FRAMES = `const request = window.requestAnimationFrame.bind(window);
window.requestAnimationFrame = (draw) => request(() => request(() => request(() => request(() => request(draw)))));`;

/** A user at Bandwright's screen, in that user's words. */
export class Session {
  readonly app: RunningApp;
  readonly page: Page;
  readonly home: string;
  /** What the browser complained of: errors on the console, uncaught ones, breaches of the content policy. */
  readonly complaints: string[] = [];

  private constructor(app: RunningApp, page: Page, home: string) {
    this.app = app;
    this.page = page;
    this.home = home;
  }

  static async start(browser: Browser, opts: SessionOpts = {}): Promise<Session> {
    const home = await mkdtemp(join(tmpdir(), "bandwright-user-"));
    await mkdir(join(home, "Bandwright"));
    for (const [name, text] of Object.entries(opts.projects ?? {})) await writeFile(join(home, "Bandwright", name), text);
    const app = await startApp({ home, ...(opts.file === undefined ? {} : { file: opts.file }) });
    const context = await browser.newContext({ viewport: opts.size ?? { width: 1440, height: 900 }, reducedMotion: "reduce" });
    const page = await context.newPage();
    const session = new Session(app, page, home);
    page.on("console", (message) => {
      if (message.type() === "error" || message.type() === "warning") session.complaints.push(message.text());
    });
    page.on("pageerror", (error) => session.complaints.push(error.message));
    await page.exposeBinding("tellViolation", (_source, text: string) => session.complaints.push(text));
    await page.addInitScript(`addEventListener("securitypolicyviolation", (event) => tellViolation(event.violatedDirective + " " + event.blockedURI))`);
    if (opts.lateFrames) await page.addInitScript(LATE_FRAMES);
    await page.goto(app.url);
    await page.locator(".app").waitFor();
    return session;
  }

  /** Ends the session; whatever the browser complained of fails the test. */
  async end(): Promise<void> {
    await this.page.context().close();
    await this.app.stop();
    await rm(this.home, { recursive: true, force: true });
    expect(this.complaints).toEqual([]);
  }

  path(name: string): string {
    return join(this.home, "Bandwright", name);
  }

  subtitle(): Promise<string> {
    return this.page.getByTestId("subtitle").innerText();
  }

  dialog(name: string | RegExp): Locator {
    return this.page.getByRole("dialog", { name });
  }

  /** Chooses an entry of a menu with the pointer. */
  async menu(menu: string, entry: string | RegExp): Promise<void> {
    await this.page.getByRole("menuitem", { name: menu, exact: true }).click();
    await this.page.getByRole("menuitem", { name: entry }).click();
  }

  readonly keyboard = {
    press: (...keys: readonly string[]): Promise<void> => this.press(keys),
    type: (text: string): Promise<void> => this.page.keyboard.type(text),
    undo: (): Promise<void> => this.press(["Control+z"]),
    redo: (): Promise<void> => this.press(["Control+Shift+z"]),
    /** Finds a command by its words and does it, with hands that wait for nothing. */
    command: async (words: string): Promise<void> => {
      await this.press(["Control+k"]);
      await this.page.keyboard.type(words);
      await this.press(["Enter"]);
    },
    /** Tabs on until the element has the focus. */
    tabTo: async (target: Locator): Promise<void> => {
      for (let n = 0; n < 80; n++) {
        if (await target.evaluate((element) => element === document.activeElement)) return;
        await this.press(["Tab"]);
      }
      throw new Error("Tab never came to it");
    },
  };

  private async press(keys: readonly string[]): Promise<void> {
    for (const key of keys) await this.page.keyboard.press(key);
  }

  readonly sheet = {
    /** A band's slider, as keyboards and screen readers have it. */
    knob: (id: string): Locator => this.page.locator(`[data-band="${id}"]`),
    position: async (id: string): Promise<number> => Number(await this.sheet.knob(id).getAttribute("aria-valuenow")),
    bands: (): Promise<string[]> => this.page.locator("[data-band]").evaluateAll((all) => all.map((element) => element.getAttribute("data-band") ?? "")),
    /** Drags a knob up (negative: down) by so many pixels; calls back before it lets go. */
    drag: async (id: string, up: number, before?: () => Promise<void>): Promise<void> => {
      const box = (await this.sheet.knob(id).boundingBox())!;
      const [x, y] = [box.x + box.width / 2, box.y + box.height / 2];
      await this.page.mouse.move(x, y);
      await this.page.mouse.down();
      for (let step = 1; step <= 5; step++) await this.page.mouse.move(x, y - (up * step) / 5);
      await before?.();
      await this.page.mouse.up();
    },
    /** Selects a band with the keyboard. */
    pick: async (id: string): Promise<void> => {
      await this.sheet.knob(id).focus();
      await this.press(["Enter"]);
      await expect.poll(() => this.page.getByRole("complementary", { name: "Panel" }).innerText()).toContain(id);
    },
    /** What the response looks like, to be compared with another time. */
    response: async (): Promise<string> => {
      const box = (await this.page.locator("[data-response]").boundingBox())!;
      // Past the pointer's own marks.
      await this.page.mouse.move(2, 2);
      return (await this.page.screenshot({ clip: box })).toString("base64");
    },
  };

  readonly panel = {
    field: (label: string): Locator => this.page.getByRole("complementary", { name: "Panel" }).getByLabel(label, { exact: true }),
    value: (label: string): Promise<string> => this.panel.field(label).inputValue(),
    set: async (label: string, text: string): Promise<void> => {
      await this.panel.field(label).fill(text);
      await this.press(["Enter"]);
    },
    /** Both ends of a figure: [boost, cut]. */
    figure: async (label: string): Promise<readonly [string, string]> => {
      const [boost = "", cut = ""] = await this.page.locator(`[data-figure="${label}"] td`).allInnerTexts();
      return [boost, cut];
    },
    liveGain: (): Promise<string> => this.page.getByTestId("live-gain").innerText(),
    choose: async (label: string, option: string): Promise<void> => {
      await this.panel.field(label).click();
      await this.page.getByRole("option", { name: option }).click();
    },
  };
}
