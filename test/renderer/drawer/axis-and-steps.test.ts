import { describe, expect, test } from "vitest";
import { openScratch, capacitor, resistor } from "../../helpers/drawer.ts";
import { stepLabel, wayOf } from "../../../renderer/drawer/steps.ts";
import { axisOf, axisText, neighbourhood, placeOn } from "../../../renderer/drawer/value-axis.ts";
import { formatCode } from "../../../core/units.ts";

describe("the value axis", () => {
  const owned = [
    { value: 1000, lines: 2, quantity: 40 },
    { value: 1100, lines: 1, quantity: 5 },
    { value: 1234, lines: 1, quantity: 1 },
    { value: 2200, lines: 1, quantity: 10 },
  ];

  test("marks what is owned by its series, and the gaps between", () => {
    const { marks, from, to, most } = axisOf(owned, "resistance");
    expect(marks.filter((m) => m.quantity > 0).map((m) => [m.value, m.series])).toEqual([[1000, 12], [1100, 24], [1234, null], [2200, 12]]);
    expect(marks.filter((m) => m.quantity === 0 && m.series === 12).map((m) => m.value)).toEqual([1200, 1500, 1800]);
    expect(marks.filter((m) => m.quantity === 0 && m.series === 24).map((m) => m.value)).toEqual([1300, 1600, 2000]);
    expect([from, to, most]).toEqual([10, 1e6, 40]);
  });

  test("spans the decades in use", () => {
    const { from, to } = axisOf([{ value: 0.47, lines: 1, quantity: 1 }, { value: 2.2e7, lines: 1, quantity: 1 }], "resistance");
    expect([from, to]).toEqual([0.1, 1e8]);
    expect(placeOn({ from: 10, to: 1000 }, 100)).toBeCloseTo(0.5, 12);
  });

  test("an empty kind has decades and no gaps", () => {
    const axis = axisOf([], "capacitance");
    expect(axis.marks).toEqual([]);
    expect(axis.decades[0]).toBe(1e-11);
    expect(axisText(axis, "capacitors", String)).toBe("No capacitors in the drawer.");
  });

  test("says in words what it shows", () => {
    expect(axisText(axisOf(owned, "resistance"), "resistors", (v) => formatCode(v, "resistance"))).toBe("4 values of resistors, from 1k to 2k2. 3 E12 values between them have none: 1k2, 1k5, 1k8.");
  });

  test("a neighbourhood reaches to the E12 values on either side", () => {
    const { from, to } = neighbourhood(4700);
    expect(from).toBeGreaterThan(3300);
    expect(from).toBeLessThan(3900);
    expect(to).toBeGreaterThan(5600);
    expect(to).toBeLessThan(6800);
  });
});

describe("undo in the drawer, as a real drawer numbers its steps", () => {
  test("undo goes back command by command, redo forward again, and a new command ends that", async () => {
    const store = await openScratch();
    store.addLine(resistor("R-1"), 5);
    store.addLine(capacitor("C-1"), 7);
    store.editLines(["R-1"], { location: "box 1" });
    const label = (way: "undo" | "redo"): string | null => {
      const steps = store.steps(100);
      const step = wayOf(steps)[way];
      return step && stepLabel(step, steps);
    };
    const take = async (way: "undo" | "redo"): Promise<void> => void (await store.undo(wayOf(store.steps(100))[way]!.id));
    expect([label("undo"), label("redo")]).toEqual(["Edit R-1", null]);
    await take("undo");
    expect([label("undo"), label("redo")]).toEqual(["Add C-1", "Edit R-1"]);
    await take("undo");
    expect([label("undo"), label("redo")]).toEqual(["Add R-1", "Add C-1"]);
    await take("redo");
    expect([label("undo"), label("redo")]).toEqual(["Add C-1", "Edit R-1"]);
    await take("redo");
    expect(store.find("R-1")!.location).toBe("box 1");
    expect([label("undo"), label("redo")]).toEqual(["Edit R-1", null]);
    await take("undo");
    store.editLines(["C-1"], { location: "box 2" });
    expect([label("undo"), label("redo")]).toEqual(["Edit C-1", null]);
    for (let n = 0; n < 3; n++) await take("undo");
    expect([label("undo"), store.info().lines]).toEqual([null, 0]);
  });
});
