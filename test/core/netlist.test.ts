import { describe, expect, test } from "vitest";
import { resolveBoard } from "../../core/net/board.ts";
import { expandBoard } from "../../core/net/expand.ts";
import { GROUND, NetlistBuilder } from "../../core/net/netlist.ts";
import { sliderResistances, trackFraction } from "../../core/net/values.ts";
import { bandOf, oneBus } from "../helpers/boards.ts";

describe("building a netlist", () => {
  test("numbers the nodes in their order, ground first, and names them", () => {
    const net = new NetlistBuilder();
    const [a, b] = [net.node("a"), net.node("b")];
    net.emf(a, 1, "emf");
    net.resistor(a, b, 10, "r");
    net.capacitor(b, GROUND, 1e-9, "c");
    expect(net.build(b)).toEqual({
      nodeCount: 3,
      nodeNames: ["ground", "a", "b"],
      output: 2,
      elements: [
        { type: "emf", plus: 1, value: 1, source: "emf" },
        { type: "resistor", a: 1, b: 2, value: 10, source: "r" },
        { type: "capacitor", a: 2, b: 0, value: 1e-9, source: "c" },
      ],
    });
  });

  test("exactly 0 Ω joins its ends; what then has both ends on one node goes", () => {
    const net = new NetlistBuilder();
    const [a, b, c] = [net.node("a"), net.node("b"), net.node("c")];
    net.emf(a, 1, "emf");
    net.resistor(a, b, 0, "link");
    net.resistor(a, b, 100, "across the link");
    net.capacitor(b, a, 1e-9, "across it too");
    net.resistor(b, c, 5, "r");
    net.resistor(c, GROUND, 5, "load");
    const built = net.build(c);
    expect(built.nodeNames).toEqual(["ground", "a", "c"]);
    expect(built.elements.map((e) => e.source)).toEqual(["emf", "r", "load"]);
    expect(built.elements[1]).toMatchObject({ a: 1, b: 2 });
  });

  test("joins chains of links, also to ground, whatever their order", () => {
    for (const order of [[0, 1, 2], [2, 1, 0], [1, 2, 0]]) {
      const net = new NetlistBuilder();
      const nodes = [net.node("a"), net.node("b"), net.node("c")];
      const source = net.node("source");
      net.emf(source, 1, "emf");
      net.resistor(source, nodes[2], 50, "r");
      const links = [() => net.merge(nodes[0], nodes[1]), () => net.merge(nodes[1], nodes[2]), () => net.resistor(nodes[0], GROUND, 0, "link")];
      for (const n of order) links[n]();
      const built = net.build(source);
      expect(built.nodeNames).toEqual(["ground", "source"]);
      expect(built.elements[1]).toMatchObject({ source: "r", a: 1, b: 0 });
    }
  });

  test("a node with nothing on it is left out, unless it is the output", () => {
    const net = new NetlistBuilder();
    const [a, idle, output] = [net.node("a"), net.node("idle"), net.node("output")];
    net.emf(a, 1, "emf");
    net.resistor(a, GROUND, 1, "r");
    expect(idle).not.toBe(output);
    expect(net.build(output)).toMatchObject({ nodeNames: ["ground", "a", "output"], output: 2 });
  });

  test("an op amp keeps its three nodes even where they are one", () => {
    const net = new NetlistBuilder();
    const a = net.node("a");
    net.emf(a, 1, "emf");
    net.opAmp(a, a, a, "ideal", "amp");
    expect(net.build(a).elements[1]).toEqual({ type: "opAmp", plus: 1, minus: 1, out: 1, model: "ideal", source: "amp" });
  });

  test("no capacitance is no element", () => {
    const net = new NetlistBuilder();
    const a = net.node("a");
    net.emf(a, 1, "emf");
    net.capacitor(a, GROUND, 0, "none");
    expect(net.build(a).elements).toHaveLength(1);
  });
});

describe("a board as elements", () => {
  const project = oneBus([bandOf("b", "gyrator-section", { seriesC: 1e-7, seriesR: 470, gyratorC: 4.7e-9, gyratorR: 1e5 }, { slider: { track: { value: 50e3 }, endR: 2, position: 0.25 } })]);

  test("every part is there once, named block.role, with its value", () => {
    const { elements } = expandBoard(resolveBoard(project));
    const named = (source: string) => elements.filter((e) => e.source === source);
    expect(elements.map((e) => e.source).sort()).toEqual([
      "b.gyratorC", "b.gyratorR", "b.opAmp", "b.seriesC", "b.seriesR", "b.slider", "b.slider", "eq.feedbackR", "eq.inputR", "eq.opAmp", "in.emf", "in.sourceR", "out.loadR", "out.seriesR",
    ]);
    expect(named("b.seriesC")).toMatchObject([{ type: "capacitor", value: 1e-7 }]);
    // R(m–w) = track·(1 − k) + endR, then R(w–p) = track·k + endR.
    expect(named("b.slider").map((e) => "value" in e && e.value)).toEqual([37_502, 12_502]);
  });

  test("a slider at an end without end resistance joins wiper and rail, with no resistor of nearly nothing", () => {
    const slider = { track: { value: 50e3 }, endR: 0 };
    const at = (position: number) => expandBoard(resolveBoard(oneBus([bandOf("b", "level-section", { seriesR: 470 }, { slider: { ...slider, position } })])));
    for (const position of [0, 1]) {
      const net = at(position);
      expect(net.elements.filter((e) => e.source === "b.slider")).toMatchObject([{ type: "resistor", value: 50e3 }]);
      expect(net.nodeCount).toBe(at(0.5).nodeCount - 1);
    }
  });

  test("an inductor brings its winding in series and its self-capacitance across both", () => {
    const coil = (windingR: number | undefined, selfC: number | undefined) =>
      expandBoard(resolveBoard(oneBus([bandOf("b", "inductor-section", { seriesC: 1e-7, seriesR: 470, inductor: { value: 0.1, ...(windingR === undefined ? {} : { windingR }), ...(selfC === undefined ? {} : { selfC }) } })])));
    expect(coil(45, 1e-10).elements.filter((e) => e.source.startsWith("b.inductor")).map((e) => e.source)).toEqual(["b.inductor.windingR", "b.inductor", "b.inductor.selfC"]);
    for (const plain of [coil(undefined, undefined), coil(0, 0)]) expect(plain.elements.filter((e) => e.source.startsWith("b.inductor"))).toMatchObject([{ type: "inductor", value: 0.1 }]);
  });

  test("a single supply brings its divider, its bypass and its follower", () => {
    const single = (opAmp?: string) =>
      expandBoard(resolveBoard({ ...project, supply: { kind: "single", voltage: 9, reference: { upperR: { value: 10e3 }, lowerR: { value: 22e3 }, bypassC: { value: 47e-6 }, ...(opAmp === undefined ? {} : { opAmp }) } } }));
    const parts = (net: ReturnType<typeof expandBoard>) => net.elements.filter((e) => e.source.startsWith("reference.")).map((e) => e.source);
    expect(parts(single())).toEqual(["reference.upperR", "reference.lowerR", "reference.bypassC"]);
    expect(parts(single("TL072"))).toEqual(["reference.upperR", "reference.lowerR", "reference.bypassC", "reference.opAmp"]);
    // The gyrator's resistor returns to the reference, not to ground.
    const gyratorR = single().elements.find((e) => e.source === "b.gyratorR");
    expect(gyratorR).toMatchObject({ b: single().nodeNames.indexOf("reference.divider") });
    expect(single("TL072").elements.find((e) => e.source === "b.gyratorR")).toMatchObject({ b: single("TL072").nodeNames.indexOf("reference.out") });
  });
});

describe("slider laws", () => {
  test.each([
    [undefined, 0.3, 0.3],
    ["linear", 0.3, 0.3],
    [{ power: 1 }, 0.3, 0.3],
    [{ power: 2 }, 0.75, 0.625],
    [{ power: 2 }, 0.25, 0.375],
    [{ power: 3 }, 0.9, 0.756],
    [{ power: 0.5 }, 0.625, 0.75],
  ] as const)("%j at %d has the fraction %d", (law, position, fraction) => {
    expect(trackFraction(law === undefined ? {} : { law }, position)).toBeCloseTo(fraction, 12);
    for (const [at, k] of [[0, 0], [0.5, 0.5], [1, 1]]) expect(trackFraction(law === undefined ? {} : { law }, at)).toBe(k);
  });

  test("the two parts of the track, with the resistance left at each end", () => {
    expect(sliderResistances({ track: { value: 10e3, measured: 9e3 }, position: 0 , endR: 5 }, 0.2)).toEqual({ boost: 8005, cut: 2005 });
    expect(sliderResistances({ track: { value: 10e3, measured: 9e3 }, position: 0 }, 0.2, { isMeasured: true })).toEqual({ boost: 7200, cut: 1800 });
  });
});
