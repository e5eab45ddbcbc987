// @vitest-environment jsdom
import { act } from "react";
import { afterEach, beforeEach, describe, expect, test, vi } from "vitest";
import { boardOf, gyratorAt, THIRD_OCTAVES, twoStages } from "../../helpers/sheet-boards.ts";
import { Pen } from "../../../renderer/sheet/draw/pen.ts";
import { INKS } from "../../../renderer/sheet/tokens.ts";
import { mountSheet, stubSurroundings, type Mounted } from "./mount-sheet.tsx";

const FREQUENCIES = [4000, 63, 250, 1000];
let sheet: Mounted;

beforeEach(async () => {
  stubSurroundings();
  sheet = await mountSheet(boardOf(FREQUENCIES.map((f) => gyratorAt(f))));
});
afterEach(async () => {
  await sheet.unmount();
  vi.restoreAllMocks();
  vi.unstubAllGlobals();
});

const knobs = (): HTMLElement[] => [...sheet.page.querySelectorAll<HTMLElement>("[data-band]")];
const knob = (id: string): HTMLElement => sheet.page.querySelector<HTMLElement>(`[data-band="${id}"]`)!;

async function press(target: HTMLElement, key: string, opts: KeyboardEventInit = {}): Promise<void> {
  await act(async () => {
    target.dispatchEvent(new KeyboardEvent("keydown", { key, bubbles: true, cancelable: true, ...opts }));
    target.dispatchEvent(new KeyboardEvent("keyup", { key, bubbles: true, ...opts }));
  });
}

async function point(type: string, at: { x: number; y: number }, opts: MouseEventInit = {}): Promise<void> {
  await act(async () => {
    sheet.sheet.dispatchEvent(new MouseEvent(type, { bubbles: true, cancelable: true, button: 0, clientX: at.x, clientY: at.y, ...opts }));
  });
}

/** Every sixteenth pixel of all layers that carries ink. */
function inkedPixels(): number {
  let count = 0;
  for (const canvas of sheet.page.querySelectorAll("canvas")) {
    const { data } = canvas.getContext("2d")!.getImageData(0, 0, canvas.width, canvas.height);
    for (let i = 3; i < data.length; i += 64) if (data[i] > 0) count++;
  }
  return count;
}

describe("the sheet", () => {
  test("draws on its four layers", async () => {
    await act(async () => new Promise((resolve) => { setTimeout(resolve, 50); }));
    expect(sheet.page.querySelectorAll("canvas")).toHaveLength(4);
    expect(inkedPixels()).toBeGreaterThan(2000);
  });

  test("has a slider for every band, from left to right, named and told in words", () => {
    expect(knobs().map((k) => k.dataset.band)).toEqual(["b63", "b250", "b1000", "b4000"]);
    const one = knob("b1000");
    expect(one.getAttribute("role")).toBe("slider");
    expect(one.getAttribute("aria-label")).toBe("1 kHz");
    expect(one.getAttribute("aria-valuenow")).toBe("50");
    expect(one.getAttribute("aria-valuetext")).toMatch(/^[+−]?\d+\.\d dB, 50 % of travel$/);
    expect(one.tabIndex).toBe(0);
  });

  test("has a button for every block of the chain", async () => {
    const names = [...sheet.page.querySelectorAll<HTMLElement>("[data-block]")].map((b) => b.dataset.block);
    expect(new Set(names)).toEqual(new Set(["in", "eq", "out"]));
    await press(sheet.page.querySelector<HTMLElement>('[data-block="eq"]')!, "Enter");
    expect(sheet.selection()).toEqual(["eq"]);
  });

  test("keys move a slider: arrows by 1 %, with Shift and Page by 10 %, Home and End to its ends, 0 to the centre", async () => {
    const one = knob("b1000");
    const now = (): number => Number(one.getAttribute("aria-valuenow"));
    await press(one, "ArrowUp");
    expect(now()).toBe(51);
    await press(one, "ArrowDown", { shiftKey: true });
    expect(now()).toBe(41);
    await press(one, "PageUp");
    expect(now()).toBe(51);
    await press(one, "End");
    expect(now()).toBe(100);
    expect(one.getAttribute("aria-valuetext")).toMatch(/^\+\d+\.\d dB, 100 % of travel$/);
    await press(one, "Home");
    expect(now()).toBe(0);
    await press(one, "0");
    expect(now()).toBe(50);
    // Every key was one gesture with an end.
    expect(sheet.log.filter(([name]) => name === "start")).toHaveLength(6);
    expect(sheet.log.filter(([name]) => name === "end")).toHaveLength(6);
  });

  test("a knob follows the pointer, finer with Shift; the release ends the gesture", async () => {
    const at = sheet.handle.screenPlaceOf("b1000", "knob")!;
    await point("pointerdown", at);
    expect(sheet.selection()).toEqual(["b1000"]);
    await point("pointermove", { x: at.x, y: at.y - 20 });
    const coarse = sheet.project().blocks.find((b) => b.id === "b1000")!.slider!.position;
    expect(coarse).toBeGreaterThan(0.6);
    expect(sheet.handle.screenPlaceOf("b1000", "knob")!.y).toBeCloseTo(at.y - 20, 0);
    await point("pointermove", { x: at.x, y: at.y - 20 }, { shiftKey: true });
    await point("pointermove", { x: at.x, y: at.y - 30 }, { shiftKey: true });
    const fine = sheet.project().blocks.find((b) => b.id === "b1000")!.slider!.position;
    expect((fine - coarse) / (coarse - 0.5)).toBeCloseTo(0.05, 2);
    await point("pointerup", { x: at.x, y: at.y - 30 });
    expect(sheet.log.map(([name]) => name).filter((n) => n === "start" || n === "end")).toEqual(["start", "end"]);
  });

  test("a press alone starts no gesture, Esc takes one back, a double click centres", async () => {
    const at = sheet.handle.screenPlaceOf("b63", "knob")!;
    await point("pointerdown", at);
    await point("pointerup", at);
    expect(sheet.log.some(([name]) => name === "start")).toBe(false);
    await point("pointerdown", at);
    await point("pointermove", { x: at.x, y: at.y - 30 });
    await press(sheet.sheet, "Escape");
    await point("pointerup", { x: at.x, y: at.y - 30 });
    expect(sheet.log.filter(([name]) => name === "cancel" || name === "end")).toEqual([["cancel"]]);
    expect(knob("b63").getAttribute("aria-valuenow")).toBe("50");
    await press(knob("b63"), "End");
    await point("dblclick", sheet.handle.screenPlaceOf("b63", "knob")!);
    expect(knob("b63").getAttribute("aria-valuenow")).toBe("50");
  });

  test("a band dragged by its figures is moved by hand, in one step; Arrange puts it back", async () => {
    const box = sheet.handle.screenPlaceOf("b250", "block")!;
    const grip = { x: box.x - 20, y: box.y + 130 };
    await point("pointerdown", grip);
    await point("pointermove", { x: grip.x + 20, y: grip.y });
    await point("pointermove", { x: grip.x + 60, y: grip.y + 10 });
    expect(sheet.log.some(([name]) => name === "place")).toBe(false);
    await point("pointerup", { x: grip.x + 60, y: grip.y + 10 });
    const places = sheet.log.filter(([name]) => name === "place");
    expect(places).toHaveLength(1);
    expect(places[0][1]).toMatchObject([{ id: "b250", at: { byHand: true } }]);
    expect(sheet.handle.screenPlaceOf("b250", "block")!.x).toBeCloseTo(box.x + 60, -0.5);
    expect(sheet.handle.arrange().map((p) => p.id)).toEqual(["b250"]);
  });

  test("arrows nudge what is selected", async () => {
    await press(knob("b250"), "Enter");
    await press(sheet.sheet, "ArrowRight");
    expect(sheet.log.at(-1)).toMatchObject(["place", [{ id: "b250", at: { byHand: true } }]]);
  });

  test("a marquee selects what it touches, a click on paper nothing", async () => {
    const [a, b] = ["b63", "b250"].map((id) => sheet.handle.screenPlaceOf(id, "block")!);
    const low = { x: a.x - 60, y: 770 };
    await point("pointerdown", low);
    await point("pointermove", { x: b.x, y: a.y });
    await point("pointerup", { x: b.x, y: a.y });
    expect(sheet.selection()).toEqual(["b63", "b250"]);
    await point("pointerdown", low);
    await point("pointerup", low);
    expect(sheet.selection()).toEqual([]);
  });

  test("a value is edited where it stands: up steps to the next preferred value, Enter takes it, a fault is told", async () => {
    await act(async () => sheet.handle.editValue("b1000"));
    const input = (): HTMLInputElement | null => sheet.page.querySelector<HTMLInputElement>(".sheet-value input");
    expect(input()!.value).toBe("220n");
    await press(input()!, "ArrowUp");
    expect(input()!.value).toBe("270n");
    const type = async (text: string): Promise<void> => act(async () => {
      Object.getOwnPropertyDescriptor(HTMLInputElement.prototype, "value")!.set!.call(input(), text);
      input()!.dispatchEvent(new Event("input", { bubbles: true }));
    });
    await type("bad");
    await press(input()!, "Enter");
    expect(sheet.page.querySelector("[role=alert]")!.textContent).toBe("not understood");
    expect(input()!.getAttribute("aria-invalid")).toBe("true");
    await type("330n");
    await press(input()!, "Enter");
    expect(sheet.log.filter(([name]) => name === "edit")).toEqual([["edit", "b1000", "seriesC", "bad"], ["edit", "b1000", "seriesC", "330n"]]);
    expect(input()).toBeNull();
  });

  test("the response has a cursor for keys and for the pointer", async () => {
    const response = sheet.page.querySelector<HTMLElement>("[data-response]")!;
    await press(response, "ArrowRight");
    expect(response.getAttribute("aria-valuetext")).toMatch(/^1\.03 kHz: [+−]?\d+\.\d\d dB, −?\d+\.\d°$/);
    const at = sheet.handle.screenPlaceOf("b250", "knob")!;
    await point("pointermove", { x: at.x, y: 100 });
    const [, frequency] = sheet.log.findLast(([name]) => name === "cursor")! as [string, number];
    expect(frequency / 250).toBeCloseTo(1, 0);
  });

  test("zooming brings a band nearer, fitting brings all of them back", async () => {
    const before = sheet.handle.screenPlaceOf("b63", "knob")!;
    await act(async () => sheet.handle.zoomBy(3));
    expect(sheet.handle.screenPlaceOf("b63", "knob")!.x).toBeLessThan(before.x - 200);
    await act(async () => sheet.handle.focusBlock("b63"));
    expect(document.activeElement).toBe(knob("b63"));
    expect(sheet.handle.screenPlaceOf("b63", "knob")!.x).toBeGreaterThan(200);
    await act(async () => sheet.handle.fit());
    expect(sheet.handle.screenPlaceOf("b63", "knob")).toEqual(before);
  });

  test("the figures of a board that oscillates are struck, its parts are not", async () => {
    const written = vi.spyOn(Pen.prototype, "text");
    const struck = (): readonly string[] => written.mock.calls.filter(([, , , opts]) => opts?.isStruck === true).map(([text]) => text);
    const drawn = (): Promise<void> => act(async () => new Promise((resolve) => { setTimeout(resolve, 50); }));
    await act(async () => sheet.handle.zoomBy(1.01));
    await drawn();
    expect(written.mock.calls.map(([text]) => text)).toContain("470R");
    expect(struck()).toEqual([]);
    const other = await mountSheet(boardOf([gyratorAt(1000)]), { isVoid: true });
    await drawn();
    await other.unmount();
    expect(struck()).toEqual(expect.arrayContaining([expect.stringMatching(/^▲ \+[\d.]+ dB$/), expect.stringMatching(/^▼ −[\d.]+ dB$/), expect.stringMatching(/^Q /), expect.stringMatching(/^[+−]?[\d.]+ dB$/)]));
    expect(struck()).not.toContain("470R");
    expect(struck()).not.toContain("1 kHz");
  });

  test("a band that oscillates at one end only has that end's figures struck and its name marked, wherever they are written", async () => {
    const written = vi.spyOn(Pen.prototype, "text");
    const marked = vi.spyOn(Pen.prototype, "warningSign");
    const struck = (): readonly string[] => written.mock.calls.filter(([, , , opts]) => opts?.isStruck === true).map(([text]) => text);
    const drawn = (): Promise<void> => act(async () => new Promise((resolve) => { setTimeout(resolve, 50); }));
    const other = await mountSheet(boardOf([gyratorAt(250), gyratorAt(1000)]), { unstableEnds: [{ id: "b1000", end: "boost" }] });
    await drawn();
    expect([...new Set(struck())]).toEqual([expect.stringMatching(/^▲ /), expect.stringMatching(/kHz$/), expect.stringMatching(/^Q /)]);
    expect(new Set(marked.mock.calls.map(String)).size).toBe(1);
    const named = (id: string): string => other.page.querySelector(`[data-band="${id}"]`)!.getAttribute("aria-label")!;
    expect([named("b250"), named("b1000")]).toEqual(["250 Hz", "1 kHz, unstable at full boost"]);
    // The curve of the band alone is that end's too, and so is what stands beside it.
    written.mockClear();
    await press(other.page.querySelector<HTMLElement>('[data-band="b1000"]')!, "Enter");
    await drawn();
    expect(struck()).toContainEqual(expect.stringMatching(/^1 kHz alone, full boost/));
    await press(other.page.querySelector<HTMLElement>('[data-band="b1000"]')!, "Home");
    written.mockClear();
    await press(other.page.querySelector<HTMLElement>('[data-band="b1000"]')!, "PageUp");
    await drawn();
    expect(written.mock.calls.find(([text]) => /alone, full cut/.test(text))![3]!.isStruck).toBe(false);
    await other.unmount();
  });

  test("on a crowded bus too, and on the card of the selected band, which lies over nobody's figures", async () => {
    const bands = THIRD_OCTAVES.map((f) => gyratorAt(f, `b${f}`.replace(".", "_")));
    const other = await mountSheet(boardOf(bands), { unstableEnds: [{ id: "b1000", end: "cut" }] });
    const drawn = (): Promise<void> => act(async () => new Promise((resolve) => { setTimeout(resolve, 50); }));
    await drawn();
    const written = vi.spyOn(Pen.prototype, "text");
    const marked = vi.spyOn(Pen.prototype, "warningSign");
    const boxed = vi.spyOn(Pen.prototype, "box");
    await press(other.page.querySelector<HTMLElement>('[data-band="b1000"]')!, "Enter");
    await drawn();
    const struck = written.mock.calls.filter(([, , , opts]) => opts?.isStruck === true).map(([text]) => text);
    expect([...new Set(struck)]).toEqual([expect.stringMatching(/^▼ −[\d.]+ dB$/)]);
    // Under the band, and on its card.
    expect(new Set(marked.mock.calls.map(String)).size).toBe(2);
    const [x, y, width, height] = boxed.mock.calls.findLast(([, , , , opts]) => opts.stroke === INKS.paper.accent)!;
    const inside = written.mock.calls.filter(([, tx, ty]) => Math.abs(tx - x) < width / 2 && Math.abs(ty - y) < height / 2).map(([text]) => text);
    expect(inside.join(" ")).toMatch(/1 kHz.*▲.*▼.*Q /);
    // Nothing but its own lines: every other band's label and figures stay in sight.
    expect(inside.filter((text) => /^\d/.test(text) && text !== "1 kHz")).toEqual([]);
    // A click on the card is one on its band, not on bare paper.
    const click = async (at: { x: number; y: number }): Promise<void> => {
      for (const type of ["pointerdown", "pointerup"]) {
        await act(async () => void other.sheet.dispatchEvent(new MouseEvent(type, { bubbles: true, cancelable: true, button: 0, clientX: at.x, clientY: at.y })));
      }
    };
    await click({ x, y });
    expect(other.selection()).toEqual(["b1000"]);
    await click({ x: x - width / 2 - 3, y: y + height / 2 + 3 });
    expect(other.selection()).not.toEqual(["b1000"]);
    await other.unmount();
  });

  test("what lies over its top takes room from the response alone", async () => {
    const place = (page: HTMLElement, selector: string): { top: number; bottom: number } => {
      const { style } = page.querySelector<HTMLElement>(selector)!;
      return { top: parseFloat(style.top), bottom: parseFloat(style.top) + parseFloat(style.height) };
    };
    const [response, knobPlace] = [place(sheet.page, "[data-response]"), sheet.handle.screenPlaceOf("b1000", "knob")];
    const other = await mountSheet(boardOf(FREQUENCIES.map((f) => gyratorAt(f))), { topInset: 46 });
    expect(place(other.page, "[data-response]")).toEqual({ top: response.top + 46, bottom: response.bottom });
    expect(other.handle.screenPlaceOf("b1000", "knob")).toEqual(knobPlace);
    await other.unmount();
  });

  test("a board taller than its place has a bar that moves it, by pointer and by keys; one that fits has none", async () => {
    expect(sheet.page.querySelector("[role=scrollbar]")).toBeNull();
    await sheet.unmount();
    vi.restoreAllMocks();
    stubSurroundings(716, 606);
    sheet = await mountSheet(twoStages(THIRD_OCTAVES.map((f) => gyratorAt(f, `b${f}`.replace(".", "_")))));
    const bar = sheet.page.querySelector<HTMLElement>("[role=scrollbar]")!;
    const place = (): number => sheet.handle.screenPlaceOf("b1000", "knob")!.y;
    const most = Number(bar.getAttribute("aria-valuemax"));
    expect(most).toBeGreaterThan(60);
    const top = place();
    await press(bar, "End");
    expect(Math.abs(top - place() - most)).toBeLessThanOrEqual(1);
    expect(bar.getAttribute("aria-valuenow")).toBe(String(most));
    await press(bar, "ArrowUp");
    expect(Math.abs(top - place() - (most - 40))).toBeLessThanOrEqual(1);
    await press(bar, "Home");
    expect(place()).toBe(top);
    // The mark is dragged; the board goes further than the hand by how much more of it there is.
    const onBar = async (type: string, y: number): Promise<void> => act(async () => {
      bar.dispatchEvent(new MouseEvent(type, { bubbles: true, cancelable: true, button: 0, clientX: 710, clientY: y }));
    });
    await onBar("pointerdown", 30);
    await onBar("pointermove", 40);
    const moved = top - place();
    expect(moved).toBeGreaterThan(10);
    expect(moved).toBeLessThan(20);
    await onBar("pointermove", 5000);
    expect(Math.abs(top - place() - most)).toBeLessThanOrEqual(1);
    await onBar("pointerup", 5000);
    await onBar("pointermove", 30);
    expect(Math.abs(top - place() - most)).toBeLessThanOrEqual(1);
    // It is no gesture on the sheet.
    expect(sheet.log.filter(([name]) => name !== "cursor")).toEqual([]);
  });

  test.each([260, 340, 420, 500, 580, 700])("reads under the cursor on a sheet %i pixels wide", async (width) => {
    await sheet.unmount();
    vi.restoreAllMocks();
    stubSurroundings(width, 606);
    sheet = await mountSheet(boardOf(FREQUENCIES.map((f) => gyratorAt(f))));
    const write = vi.spyOn(Pen.prototype, "text");
    await press(sheet.page.querySelector<HTMLElement>("[data-response]")!, "ArrowRight");
    await act(async () => new Promise((resolve) => { setTimeout(resolve, 50); }));
    expect(write.mock.calls.filter(([text]) => /Hz   .* dB   .*°$/.test(text)).length).toBeGreaterThan(0);
  });

  test("wiring faults leave the blocks on the sheet", async () => {
    await sheet.unmount();
    const project = boardOf([gyratorAt(1000)]);
    sheet = await mountSheet({ ...project, wires: project.wires.filter((w) => w.to !== "out.in") });
    expect(knob("b1000").getAttribute("aria-valuetext")).toBe("50 % of travel");
    expect(sheet.page.querySelector("[data-response]")).toBeNull();
    expect(sheet.page.querySelectorAll("[data-block]")).toHaveLength(3);
  });
});
