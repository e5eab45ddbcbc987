import { readdirSync, readFileSync } from "node:fs";
import * as fc from "fast-check";
import { describe, expect, test } from "vitest";
import { FaultError } from "../../core/errors.ts";
import { logFrequencies, respond } from "../../core/analysis/response.ts";
import { newProject } from "../../core/model/new-project.ts";
import type { Project } from "../../core/model/project.ts";
import { restoreProject } from "../../core/model/restore.ts";
import { serializeProject } from "../../core/model/serialize.ts";
import { resolveBoard } from "../../core/net/board.ts";
import { compileBoard } from "../../core/net/star.ts";
import { runs } from "../fixtures/runs.ts";
import { boardArbitrary } from "../helpers/boards.ts";

const readText = (path: string): string => readFileSync(new URL(`../../${path}`, import.meta.url), "utf8");
const EXAMPLE = readText("test/fixtures/example.bandwright");
const DEMOS = readdirSync(new URL("../../assets/demo", import.meta.url)).filter((name) => name.endsWith(".bandwright"));

/** The text after opening and saving. */
const resaved = (text: string): string => serializeProject(restoreProject(text).project);

type Json = null | boolean | number | string | Json[] | { [key: string]: Json };

/** Every object inside a value, itself included. */
function objectsIn(value: Json): { [key: string]: Json }[] {
  if (typeof value !== "object" || value === null) return [];
  if (Array.isArray(value)) return value.flatMap(objectsIn);
  return [value, ...Object.values(value).flatMap(objectsIn)];
}

const define = (object: object, key: string, value: unknown): void => void Object.defineProperty(object, key, { value, enumerable: true, configurable: true, writable: true });

describe("the example of the file format", () => {
  const { project, warnings } = restoreProject(EXAMPLE);

  test("opens without a warning, is a board, and computes", () => {
    expect(warnings).toEqual([]);
    const board = resolveBoard(project);
    expect(board.warnings).toEqual([]);
    expect(project).toMatchObject({ name: "Voice channel", supply: { kind: "split", positive: 15 }, temperature: 25 });
    const { gain } = respond(compileBoard(board), logFrequencies(10, 40e3, 21));
    for (const value of gain) expect(value).toSatisfy(Number.isFinite);
    // Centred, 3300 Ω both ways, 10 kΩ behind 100 Ω.
    expect(gain[10]).toBeCloseTo(20 * Math.log10(10000 / 10100), 1);
  });

  test("is saved in two-space JSON with a newline at the end, in its own key order", () => {
    const text = serializeProject(project);
    expect(text).toBe(`${JSON.stringify(JSON.parse(EXAMPLE), null, 2)}\n`);
    expect(text.endsWith("}\n")).toBe(true);
    expect(text.split("\n")[1]).toBe('  "format": "bandwright-project",');
  });

  test("opens with a byte order mark, and with other line ends and spacing", () => {
    expect(restoreProject(`\uFEFF${EXAMPLE}`).project).toEqual(project);
    expect(restoreProject(EXAMPLE.replaceAll("\n", "\r\n")).project).toEqual(project);
    expect(restoreProject(JSON.stringify(JSON.parse(EXAMPLE))).project).toEqual(project);
  });
});

describe.each(DEMOS)("the demo %s", (name) => {
  const text = readText(`assets/demo/${name}`);
  test("opens without a warning and comes back byte for byte", () => {
    const { project, warnings } = restoreProject(text);
    expect(warnings).toEqual([]);
    expect(resolveBoard(project).warnings).toEqual([]);
    expect(serializeProject(project)).toBe(text);
  });
});

describe("a new project", () => {
  test("opens, is a board without a warning, and computes: unity but for its source and load", () => {
    const project = newProject();
    const text = serializeProject(project);
    expect(restoreProject(text)).toEqual({ project, warnings: [] });
    const board = resolveBoard(project);
    expect(board.warnings).toEqual([]);
    expect(board.chain.map((item) => item.block.kind)).toEqual(["input", "boost-cut-stage", "output"]);
    for (const gain of respond(compileBoard(board), logFrequencies(10, 40e3, 21)).gain) expect(gain).toBeCloseTo(20 * Math.log10(10000 / 10100), 1);
  });

  test("is a fresh one each time", () => {
    expect(newProject()).toEqual(newProject());
    expect(newProject().blocks).not.toBe(newProject().blocks);
  });
});

describe("opening and saving", () => {
  test("loses nothing of random boards, and settles at once", () => {
    fc.assert(
      fc.property(boardArbitrary(), (project) => {
        const text = serializeProject(project);
        expect(restoreProject(text).project).toEqual(project);
        expect(resaved(text)).toBe(text);
      }),
      runs(300),
    );
  });

  /** The example with unknown keys scattered over objects of every level. */
  const AWKWARD = ["__proto__", "constructor", "toString", "5532", "0", "x y", "", "ключ", "a.b", "notes2", "length"];
  const scattered = fc.array(fc.record({ where: fc.nat(1000), key: fc.constantFrom(...AWKWARD), value: fc.constantFrom<Json>(null, 1, "text", [], {}, { value: -1 }, [1, [2, { three: "3" }]]), at: fc.nat(20) }), { minLength: 1, maxLength: 12 });

  function scatter(additions: readonly { where: number; key: string; value: Json; at: number }[]): Project {
    const document = JSON.parse(EXAMPLE) as { [key: string]: Json };
    for (const { where, key, value, at } of additions) {
      // Not among op amp models or parts' roles, where a key has a meaning and must hold a model or a part.
      const targets = objectsIn(document).filter((o) => o !== document.opAmps && !("seriesR" in o) && !("inputR" in o && !("outputR" in o)) && !("sourceR" in o));
      const target = targets[where % targets.length];
      if (Object.hasOwn(target, key)) continue;
      const entries = Object.entries(target);
      for (const [old] of entries) delete target[old];
      const place = at % (entries.length + 1);
      for (const [k, v] of entries.slice(0, place)) define(target, k, v);
      define(target, key, structuredClone(value));
      for (const [k, v] of entries.slice(place)) define(target, k, v);
    }
    return document as unknown as Project;
  }

  test("keeps unknown keys at every level, awkward ones too", () => {
    fc.assert(
      fc.property(scattered, (additions) => {
        const project = scatter(additions);
        const text = serializeProject(project);
        const { project: back } = restoreProject(text);
        // Compared as text, where "__proto__" is a key like any other.
        expect(JSON.stringify(JSON.parse(text))).toBe(JSON.stringify(back));
        expect(serializeProject(back)).toBe(text);
        for (const { key } of additions) expect(text).toContain(JSON.stringify(key));
      }),
      runs(500),
    );
  });

  test("gives a file with unknown keys between known ones back byte for byte", () => {
    fc.assert(
      fc.property(scattered, (additions) => {
        const project = scatter(additions);
        // Known keys stand in their order here, so what is saved is what JSON itself would write.
        expect(serializeProject(project)).toBe(`${JSON.stringify(project, null, 2)}\n`);
      }),
      runs(300),
    );
  });

  test("orders the known keys whatever order they come in", () => {
    const wanted = resaved(EXAMPLE);
    const shuffled = (value: Json, seed: number): Json => {
      if (Array.isArray(value)) return value.map((v, i) => shuffled(v, seed + i));
      if (typeof value !== "object" || value === null) return value;
      const keys = Object.keys(value);
      // Reversed, or turned round by some places.
      const turned = seed % 2 === 0 ? keys.toReversed() : [...keys.slice(seed % keys.length), ...keys.slice(0, seed % keys.length)];
      return Object.fromEntries(turned.map((key, i) => [key, shuffled(value[key], seed * 3 + i)]));
    };
    for (let seed = 0; seed < 40; seed++) {
      const text = JSON.stringify(shuffled(JSON.parse(EXAMPLE) as Json, seed));
      const saved = resaved(text);
      expect(resaved(saved)).toBe(saved);
      // Op amps keep the order of the file; there is one here.
      expect(saved).toBe(wanted);
    }
  });

  test("a project that was saved and opened is saved the same again, whatever it was", () => {
    fc.assert(
      fc.property(fc.oneof(boardArbitrary(), scattered.map(scatter)), (project) => {
        const once = serializeProject(project);
        expect(serializeProject(restoreProject(once).project)).toBe(once);
      }),
      runs(200),
    );
  });

  test("does not change the document that it saves", () => {
    const { project } = restoreProject(EXAMPLE);
    const before = structuredClone(project);
    serializeProject(project);
    expect(project).toEqual(before);
  });
});

describe("oddities that stop nothing", () => {
  test("a part under a role that its block does not have is kept, and told", () => {
    const document = JSON.parse(EXAMPLE) as { blocks: { parts: Record<string, unknown> }[] };
    document.blocks[2].parts["weird role"] = { value: 1 };
    const { project, warnings } = restoreProject(JSON.stringify(document));
    expect(warnings).toHaveLength(1);
    expect(warnings[0]).toMatchObject({ path: 'blocks[2].parts["weird role"]', blocks: ["b1k"] });
    expect(warnings[0].message).toContain("its roles are seriesC, seriesR, gyratorC, gyratorR");
    expect(serializeProject(project)).toContain('"weird role"');
  });

  test("what need not be there may be absent: notes, temperature, labels, tolerances, op amps, a buffer's parts, law and endR", () => {
    const bare = {
      format: "bandwright-project", version: 1, name: "Bare", supply: { kind: "single", voltage: 9, reference: { upperR: { value: 1e4 }, lowerR: { value: 1e4 }, bypassC: { value: 1e-5 } } },
      blocks: [
        { id: "in", kind: "input", parts: { sourceR: { value: 100 } } },
        { id: "u", kind: "buffer", opAmp: "ideal" },
        { id: "b", kind: "level-section", slider: { track: { value: 1e4 }, position: 0 }, parts: { seriesR: { value: 470 } } },
        { id: "eq", kind: "boost-cut-stage", opAmp: "ideal", parts: { inputR: { value: 3300 }, feedbackR: { value: 3300 } } },
        { id: "out", kind: "output", parts: { seriesR: { value: 100 }, loadR: { value: 1e4 } } },
      ],
      wires: [{ from: "in.out", to: "u.in" }, { from: "u.out", to: "eq.in" }, { from: "eq.bus", to: "b.bus" }, { from: "eq.out", to: "out.in" }],
    };
    const { project, warnings } = restoreProject(JSON.stringify(bare));
    expect(warnings).toEqual([]);
    expect(JSON.stringify(project)).toBe(JSON.stringify(bare));
    expect(respond(compileBoard(resolveBoard(project)), new Float64Array([1000])).gain[0]).toBeCloseTo(20 * Math.log10(470 / 3770) + 20 * Math.log10(100 / 101), 0);
  });
});

test("a fault error says all its faults, a line each", () => {
  const error = new FaultError([{ path: "a.b", message: "is wrong" }, { path: "", message: "as a whole" }]);
  expect(error.message).toBe("a.b: is wrong\nas a whole");
  expect(error.faults).toHaveLength(2);
});
