/** One suite for every block kind there is: it reads the definitions and knows no kind by name. */
import * as fc from "fast-check";
import { describe, expect, test, vi } from "vitest";
import { lawResults } from "../../core/analysis/laws.ts";
import { angular, logFrequencies } from "../../core/analysis/response.ts";
import { LEG_REGISTERS, type Leg, type LegCase, type LegPort } from "../../core/blocks/definition.ts";
import { BAND_KINDS, BLOCKS } from "../../core/blocks/index.ts";
import { BLOCK_KINDS, type BlockKind } from "../../core/blocks/kinds.ts";
import { newBlock, newProject } from "../../core/model/new-project.ts";
import { partsOf, type Block, type OpAmpModel, type Part, type Project } from "../../core/model/project.ts";
import { restoreProject } from "../../core/model/restore.ts";
import { serializeProject } from "../../core/model/serialize.ts";
import { resolveBoard } from "../../core/net/board.ts";
import { expandBoard } from "../../core/net/expand.ts";
import { nodalTransfer } from "../../core/net/nodal.ts";
import { compileBoard, Sweep } from "../../core/net/star.ts";
import { transferColumns, type TransferColumns } from "../../core/net/transfer.ts";
import { blockValues } from "../../core/net/values.ts";
import { Dual } from "../../core/num/dual.ts";
import { probeLeg } from "../fixtures/leg-probe.ts";
import { runs } from "../fixtures/runs.ts";
import { blockArbitrary, modelArbitrary, partsArbitrary } from "../helpers/boards.ts";

vi.setConfig({ testTimeout: 30_000 });

const caseFiles: Readonly<Record<string, { readonly CASES: readonly LegCase[] }>> = import.meta.glob("../../core/blocks/*/cases.ts", { eager: true });
const casesOf = (kind: BlockKind): readonly LegCase[] => caseFiles[`../../core/blocks/${kind}/cases.ts`]?.CASES ?? [];

/** A board in which a block of the kind takes part: the new project with a band that draws current, and the block wherever its place lets it. */
function boardWith(block: Block): Project {
  const empty = newProject();
  const drawing: Block = { ...newBlock("level-section", "host"), slider: { track: { value: 10e3 }, position: 0.3 } };
  const project = { ...empty, blocks: [...empty.blocks, drawing], wires: [...empty.wires, { from: "eq.bus", to: "host.bus" }] };
  const { place } = BLOCKS[block.kind];
  const own = empty.blocks.find((b) => b.kind === block.kind);
  if (own) return { ...project, blocks: project.blocks.map((b) => (b === own ? { ...block, id: own.id } : b)) };
  const wires = place === "band" ? [...project.wires, { from: "eq.bus", to: `${block.id}.bus` }] : project.wires.flatMap((w) => (w.from === "in.out" ? [{ from: "in.out", to: `${block.id}.in` }, { from: `${block.id}.out`, to: w.to }] : [w]));
  return { ...project, blocks: [...project.blocks, block], wires };
}

function fast(project: Project, frequency: Float64Array): TransferColumns {
  const compiled = compileBoard(resolveBoard(project));
  const out = transferColumns(frequency.length, true);
  new Sweep(compiled, angular(frequency)).run(compiled.positions, out);
  return out;
}

function nodal(project: Project, frequency: Float64Array): TransferColumns {
  const out = transferColumns(frequency.length, true);
  nodalTransfer(expandBoard(resolveBoard(project)), angular(frequency), out);
  return out;
}

const distanceAt = (a: TransferColumns, b: TransferColumns, k: number): number => Math.hypot(a.re[k] - b.re[k], a.im[k] - b.im[k]) / Math.hypot(b.re[k], b.im[k]);
/** A leg as a two-port at one frequency. */
function portOf(leg: Leg, omega: number): LegPort {
  const port = { ww: new Dual(), wr: new Dual(), rw: new Dual(), rr: new Dual() };
  leg.port(omega, port, Array.from({ length: LEG_REGISTERS }, () => new Dual()));
  return port;
}
const AUDIO = logFrequencies(10, 40e3, 9);

describe.each(BLOCK_KINDS)("%s", (kind) => {
  const definition = BLOCKS[kind];
  const isBand = definition.place === "band";

  test("says all that files and screens need of it", () => {
    expect(definition.kind).toBe(kind);
    expect(definition.label).toMatch(/\S/);
    expect(definition.ports).toEqual(isBand ? ["bus"] : expect.not.arrayContaining([undefined]));
    expect(definition.hasSlider).toBe(isBand);
    expect(definition.leg !== undefined).toBe(isBand);
    expect(definition.shape !== undefined).toBe(isBand);
    const { roles } = definition;
    expect(new Set(roles.map((r) => r.role)).size).toBe(roles.length);
    expect(new Set(roles.map((r) => r.label)).size).toBe(roles.length);
    for (const role of roles) {
      expect(role.role).toMatch(/^[a-z][A-Za-z]*$/);
      expect(role.label).toMatch(/\S/);
      expect(["resistance", "capacitance", "inductance"]).toContain(role.quantity);
      expect(role.value).toBeGreaterThan(0);
      expect(role.tolerance).toBeGreaterThan(0);
      expect(role.tolerance).toBeLessThan(1);
    }
  });

  test("has every role, and no other, in its drawing, once", () => {
    const drawn = definition.drawing.symbols.flatMap((symbol) => ("role" in symbol ? [symbol.role] : []));
    expect([...drawn].sort()).toEqual(definition.roles.map((r) => r.role).sort());
    for (const symbol of definition.drawing.symbols) {
      if (!("role" in symbol)) continue;
      const role = definition.roles.find((r) => r.role === symbol.role)!;
      expect({ resistor: "resistance", capacitor: "capacitance", inductor: "inductance" }[symbol.symbol]).toBe(role.quantity);
      expect(symbol.absent !== undefined).toBe(role.isOptional);
    }
    const isWithAmp = definition.drawing.symbols.some((s) => s.symbol === "amplifier");
    expect(isWithAmp).toBe(definition.hasOpAmp);
  });

  test("with its defaults makes a valid file and a board that computes", () => {
    const project = boardWith(newBlock(kind, "new"));
    const restored = restoreProject(serializeProject(project));
    expect(restored.warnings).toEqual([]);
    expect(restored.project).toEqual(project);
    const board = resolveBoard(restored.project);
    expect(board.warnings).toEqual([]);
    const [columns, reference] = [fast(project, AUDIO), nodal(project, AUDIO)];
    for (let k = 0; k < AUDIO.length; k++) expect(distanceAt(columns, reference, k)).toBeLessThan(1e-9);
  });

  test("with anything random comes back from its file as it was, and equals the node equations", () => {
    fc.assert(
      fc.property(blockArbitrary(kind, "new"), (block) => {
        const named = block.opAmp?.startsWith("house") ? { ...block, opAmp: "TL072" } : block;
        const project = boardWith(named);
        const text = serializeProject(project);
        expect(restoreProject(text).project).toEqual(project);
        expect(serializeProject(restoreProject(text).project)).toBe(text);
        const [columns, reference] = [fast(project, AUDIO), nodal(project, AUDIO)];
        for (let k = 0; k < AUDIO.length; k++) expect(distanceAt(columns, reference, k)).toBeLessThan(1e-9);
      }),
      runs(60),
    );
  });

  test("stays finite towards 0 Hz and towards infinity", () => {
    fc.assert(
      fc.property(blockArbitrary(kind, "new"), (block) => {
        const named = block.opAmp?.startsWith("house") ? { ...block, opAmp: "NE5532" } : block;
        const columns = fast(boardWith(named), new Float64Array([1e-9, 1e-3, 1e9, 1e12]));
        for (const column of [columns.re, columns.im, columns.slopeRe!, columns.slopeIm!]) for (const value of column) expect(value).toSatisfy(Number.isFinite);
      }),
      runs(60),
    );
  });

  const optional = definition.roles.filter((r) => r.isOptional).map((r) => r.role);
  test.skipIf(optional.length === 0).each(optional)("without %s does what a vanishing part there does", (role) => {
    const quantity = definition.roles.find((r) => r.role === role)!.quantity;
    // Nothing, or a wire: an infinite or a zero impedance in the part's place.
    const vanishing = quantity === "capacitance" ? [1e-24, 1e9] : [1e18, 1e-9];
    const block = newBlock(kind, "new");
    const part = (value: number): Block => ({ ...block, ...(block.slider ? { slider: { ...block.slider, position: 0.9 } } : {}), parts: { ...partsOf(block), [role]: { value } } });
    const { [role]: _gone, ...others } = part(1).parts!;
    const absent = fast(boardWith({ ...part(1), parts: others }), AUDIO);
    const most = (value: number): number => Math.max(...AUDIO.map((_, k) => distanceAt(fast(boardWith(part(value)), AUDIO), absent, k)));
    expect(Math.min(...vanishing.map(most))).toBeLessThan(1e-9);
    // A part of the usual value is not the same as none.
    expect(most(definition.roles.find((r) => r.role === role)!.value)).toBeGreaterThan(1e-9);
  });
});

describe.each(BAND_KINDS)("the leg of a %s", (kind) => {
  const definition = BLOCKS[kind];
  const closedForm = (parts: Readonly<Record<string, Part>>, opAmp: OpAmpModel | "ideal") => definition.leg!(blockValues({ id: "b", kind, parts }), opAmp);
  const random = fc.tuple(partsArbitrary(kind), fc.oneof(fc.constant("ideal" as const), modelArbitrary), fc.integer({ min: 500, max: 6000 }));

  test("in closed form equals its expansion: admittance to 1e-10", () => {
    fc.assert(
      fc.property(random, ([parts, opAmp, at]) => {
        const omega = 2 * Math.PI * 10 ** (at / 1000);
        const [re, im] = [new Float64Array(1), new Float64Array(1)];
        closedForm(parts, opAmp).admittance(new Float64Array([omega]), re, im);
        const exact = probeLeg(kind, parts, opAmp, omega);
        expect(Math.hypot(re[0] - exact.re, im[0] - exact.im)).toBeLessThanOrEqual(1e-10 * Math.hypot(exact.re, exact.im));
      }),
      runs(200),
    );
  });

  test("as a two-port equals its expansion: all four admittances and their d/ds to 1e-10", () => {
    fc.assert(
      fc.property(random, ([parts, opAmp, at]) => {
        const omega = 2 * Math.PI * 10 ** (at / 1000);
        const port = portOf(closedForm(parts, opAmp), omega);
        const own = (driven: "wiper" | "reference", where: "wiper" | "reference") => probeLeg(kind, parts, opAmp, omega, driven, where);
        const pairs = [
          [port.ww, own("wiper", "wiper")],
          [port.wr, own("reference", "wiper")],
          [port.rw, own("wiper", "reference")],
          [port.rr, own("reference", "reference")],
        ] as const;
        // What cancels in a sum of currents may leave the rounding of the largest part's.
        const rounding = 1e-15 * Math.max(...definition.roles.map(({ role, quantity }) => (parts[role] ? { resistance: 1 / parts[role].value, capacitance: omega * parts[role].value, inductance: 0 }[quantity] : 0)));
        for (const [found, exact] of pairs) {
          expect(Math.hypot(found.re - exact.re, found.im - exact.im)).toBeLessThanOrEqual(1e-10 * Math.hypot(exact.re, exact.im) + rounding);
          expect(Math.hypot(found.dre - exact.slopeRe, found.dim - exact.slopeIm)).toBeLessThanOrEqual(1e-10 * Math.hypot(exact.slopeRe, exact.slopeIm) + rounding / omega);
        }
      }),
      runs(80),
    );
  });

  test("gives at one point what it gives in a column, digit for digit", () => {
    fc.assert(
      fc.property(random, ([parts, opAmp]) => {
        const leg = closedForm(parts, opAmp);
        const omega = angular(AUDIO);
        const [re, im] = [new Float64Array(omega.length), new Float64Array(omega.length)];
        leg.admittance(omega, re, im);
        omega.forEach((w, k) => {
          const [oneRe, oneIm] = [new Float64Array(1), new Float64Array(1)];
          leg.admittance(new Float64Array([w]), oneRe, oneIm);
          expect([oneRe[0], oneIm[0]]).toEqual([re[k], im[k]]);
        });
      }),
      runs(20),
    );
  });

  test("stays finite towards 0 Hz and towards infinity", () => {
    fc.assert(
      fc.property(random, ([parts, opAmp]) => {
        const omega = new Float64Array([1e-9, 1e-3, 1e9, 1e12]);
        const [re, im] = [new Float64Array(4), new Float64Array(4)];
        const leg = closedForm(parts, opAmp);
        leg.admittance(omega, re, im);
        for (const value of [...re, ...im]) expect(value).toSatisfy(Number.isFinite);
        for (const w of omega) {
          const port = portOf(leg, w);
          for (const value of [...port.ww, ...port.wr, ...port.rw, ...port.rr]) expect(value).toSatisfy(Number.isFinite);
        }
      }),
      runs(60),
    );
  });

  test("with zero ohm at either end of the track equals the node equations", () => {
    fc.assert(
      fc.property(blockArbitrary(kind, "new"), fc.constantFrom(0, 1), (block, position) => {
        const { endR: _endR, ...slider } = block.slider!;
        const named = { ...block, slider: { ...slider, position }, ...(block.opAmp?.startsWith("house") ? { opAmp: "ideal" } : {}) };
        const [columns, reference] = [fast(boardWith(named), AUDIO), nodal(boardWith(named), AUDIO)];
        for (let k = 0; k < AUDIO.length; k++) expect(distanceAt(columns, reference, k)).toBeLessThan(1e-9);
      }),
      runs(40),
    );
  });

  test("has laws that work out with its defaults", () => {
    const laws = lawResults(newBlock(kind, "new"), newBlock("boost-cut-stage", "eq"));
    expect(Object.keys(laws)).toEqual(definition.laws.map((l) => l.symbol));
    for (const value of Object.values(laws)) expect(value).toSatisfy((x: number) => Number.isFinite(x) && x > 0);
    expect(laws.G).toBeGreaterThan(1);
  });

  test("has known answers", () => expect(casesOf(kind).length).toBeGreaterThan(0));
  test.each(casesOf(kind))("$about, after $source", ({ values, opAmp = "ideal", frequency, impedance: [re, im], within }) => {
    const omega = 2 * Math.PI * frequency;
    const size = Math.hypot(re, im);
    // The closed form.
    const [yr, yi] = [new Float64Array(1), new Float64Array(1)];
    definition.leg!(values, opAmp).admittance(new Float64Array([omega]), yr, yi);
    const norm = yr[0] ** 2 + yi[0] ** 2;
    expect(Math.hypot(yr[0] / norm - re, -yi[0] / norm - im) / size).toBeLessThanOrEqual(within);
    // The expansion into parts.
    const { windingR, selfC, ...roles } = values;
    const parts = Object.fromEntries(Object.entries(roles).map(([role, value]): [string, Part] => [role, role === "inductor" ? { value, ...(windingR === undefined ? {} : { windingR }), ...(selfC === undefined ? {} : { selfC }) } : { value }]));
    const y = probeLeg(kind, parts, opAmp, omega);
    const yNorm = y.re ** 2 + y.im ** 2;
    expect(Math.hypot(y.re / yNorm - re, -y.im / yNorm - im) / size).toBeLessThanOrEqual(within);
  });
});
