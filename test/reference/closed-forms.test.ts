/** Closed forms of the literature and of algebra, held against the general node equations. */
import * as fc from "fast-check";
import { describe, expect, test, vi } from "vitest";
import { logFrequencies } from "../../core/analysis/response.ts";
import type { Block } from "../../core/model/project.ts";
import { runs } from "../fixtures/runs.ts";
import { probeLeg } from "../fixtures/leg-probe.ts";
import { netlistOf, nodalH } from "../fixtures/figures.ts";
import { preciseTransfer } from "../fixtures/precise.ts";
import { bandOf, blockArbitrary, logUniform, oneBus, tenBandBoard } from "../helpers/boards.ts";
import { BAND_KINDS } from "../../core/blocks/index.ts";

vi.setConfig({ testTimeout: 30_000 });

interface Complex {
  readonly re: number;
  readonly im: number;
}
const ONE: Complex = { re: 1, im: 0 };
const add = (a: Complex, b: Complex): Complex => ({ re: a.re + b.re, im: a.im + b.im });
const scale = (a: Complex, k: number): Complex => ({ re: a.re * k, im: a.im * k });
const mul = (a: Complex, b: Complex): Complex => ({ re: a.re * b.re - a.im * b.im, im: a.re * b.im + a.im * b.re });
const inverse = (a: Complex): Complex => scale({ re: a.re, im: -a.im }, 1 / (a.re * a.re + a.im * a.im));
const div = (a: Complex, b: Complex): Complex => mul(a, inverse(b));
const distance = (a: Complex, b: Complex): number => Math.hypot(a.re - b.re, a.im - b.im) / Math.hypot(b.re, b.im);
const dB = (a: Complex): number => 20 * Math.log10(Math.hypot(a.re, a.im));

/** What the plain output of `oneBus` leaves of the stage's own output. */
const OUTPUT_SHARE = 1e6 / (1e6 + 0.01);
/** What its source adds to inputR. */
const SOURCE_R = 0.01;

describe("simulated inductor (D. F. Berndt and S. C. Dutta Roy, IEEE J. Solid-State Circuits, 1969)", () => {
  test("Z = seriesR + 1/(s·seriesC) + s·Lx/(1 + s·gyratorC·seriesR), ideal op amp, to 1e-9", () => {
    const values = fc.record({ seriesC: logUniform(1e-9, 10e-6), seriesR: logUniform(47, 10e3), gyratorC: logUniform(100e-12, 1e-6), gyratorR: logUniform(4.7e3, 470e3), frequency: logUniform(1, 1e6) });
    fc.assert(
      fc.property(values, ({ seriesC, seriesR, gyratorC, gyratorR, frequency }) => {
        const w = 2 * Math.PI * frequency;
        const lx = (gyratorR - seriesR) * seriesR * gyratorC;
        const z = add({ re: seriesR, im: -1 / (w * seriesC) }, div({ re: 0, im: w * lx }, { re: 1, im: w * gyratorC * seriesR }));
        const y = probeLeg("gyrator-section", { seriesC: { value: seriesC }, seriesR: { value: seriesR }, gyratorC: { value: gyratorC }, gyratorR: { value: gyratorR } }, "ideal", w);
        expect(distance(inverse(y), z)).toBeLessThan(1e-9);
      }),
      runs(500),
    );
  });
});

describe("ideal bus (algebra; circuits of the bus equalizer)", () => {
  // Ideal op amp: v_m = v_p = v. Band i's wiper is at v·(1 − Y'·(Ra ∥ Rb)), so its leg takes v·Y' and its track splits that
  // current, Rb/T of it from m and Ra/T from p. KCL at p: (v_in − v)/inputR = v·Σ Y'·Ra/T; at m: (v_out − v)/feedbackR =
  // v·Σ Y'·Rb/T. A source's own resistance stands in series with inputR, and no current leaves m and p otherwise.
  test("H = (1 + feedbackR·Σ Y'·Rb/T)/(1 + inputR·Σ Y'·Ra/T), on random boards, to 1e-9 dB", () => {
    let decided = 0;
    const board = fc.record({
      bands: fc.array(fc.constantFrom(...BAND_KINDS).chain((kind) => blockArbitrary(kind, "b")), { minLength: 1, maxLength: 12, size: "max" }),
      inputR: logUniform(500, 100e3),
      feedbackR: logUniform(500, 100e3),
      frequency: logUniform(10, 40e3),
    });
    fc.assert(
      fc.property(board, ({ bands: random, inputR, feedbackR, frequency }) => {
        const bands: Block[] = random.map((band, index) => ({ ...band, id: `b${index}`, ...(band.opAmp === undefined ? {} : { opAmp: "ideal" }) }));
        const netlist = netlistOf(oneBus(bands, { inputR, feedbackR }));
        let [top, bottom] = [ONE, ONE];
        for (const { kind, slider, parts } of bands) {
          const { track, position, law = "linear", endR = 0 } = slider!;
          const u = 2 * position - 1;
          const k = law === "linear" ? position : (1 + Math.sign(u) * Math.abs(u) ** law.power) / 2;
          const [ra, rb] = [track.value * (1 - k) + endR, track.value * k + endR];
          const y = probeLeg(kind, parts!, "ideal", 2 * Math.PI * frequency);
          const loaded = div(y, add(ONE, scale(y, (ra * rb) / (ra + rb))));
          top = add(top, scale(loaded, (feedbackR * rb) / (ra + rb)));
          bottom = add(bottom, scale(loaded, ((inputR + SOURCE_R) * ra) / (ra + rb)));
        }
        const wanted = scale(div(top, bottom), OUTPUT_SHARE);
        const { re, im } = nodalH(netlist, [frequency]);
        const dense = { re: re[0], im: im[0] };
        // Where the dense solve itself falls short of ten digits, the same equations in 44 digits decide.
        const found = distance(dense, wanted) < 1e-10 ? dense : preciseTransfer(netlist, 2 * Math.PI * frequency);
        if (found !== dense) decided += 1;
        expect(Math.abs(dB(found) - dB(wanted))).toBeLessThan(1e-9);
        expect(distance(found, wanted)).toBeLessThan(1e-9);
      }),
      runs(250),
    );
    expect(decided).toBeLessThan(25);
  });

  const FREQUENCY = logFrequencies(10, 40e3, 41);
  const ideal = tenBandBoard("ideal");
  /** The ten bands with feedbackR = inputR as the bus sees it. */
  const board = { ...ideal, blocks: ideal.blocks.map((b) => (b.id === "eq" ? { ...b, parts: { inputR: { value: 3000 - SOURCE_R }, feedbackR: { value: 3000 } } } : b)) };

  test("all centred and feedbackR = inputR: H = 1 at all frequencies, exactly but for rounding", () => {
    const { re, im } = nodalH(netlistOf(board), FREQUENCY);
    for (let k = 0; k < FREQUENCY.length; k++) expect(Math.hypot(re[k] / OUTPUT_SHARE - 1, im[k])).toBeLessThan(1e-11);
  });

  test("cut mirrors boost (Bohn, J. Audio Eng. Soc. 34(9), 1986; Greiner and Schoessow, 31(6), 1983): x and 1 − x give H and 1/H", () => {
    fc.assert(
      fc.property(fc.array(fc.integer({ min: 0, max: 100 }), { minLength: 10, maxLength: 10 }), (hundredths) => {
        const ids = board.blocks.filter((b) => b.slider).map((b) => b.id);
        const at = (turn: (x: number) => number): ReturnType<typeof nodalH> => nodalH(netlistOf(board, Object.fromEntries(ids.map((id, i) => [id, turn(hundredths[i] / 100)]))), FREQUENCY);
        const [up, down] = [at((x) => x), at((x) => 1 - x)];
        for (let k = 0; k < FREQUENCY.length; k++) {
          const product = mul({ re: up.re[k], im: up.im[k] }, { re: down.re[k], im: down.im[k] });
          expect(distance(scale(product, 1 / OUTPUT_SHARE ** 2), ONE)).toBeLessThan(1e-9);
        }
      }),
      runs(25),
    );
  });

  test("bandwidth narrows as boost grows (Bohn 1986; Greiner and Schoessow 1983)", () => {
    // Half-gain bandwidth of a lone leg: the further the slider, the narrower.
    const lone = oneBus([bandOf("b", "inductor-section", { seriesC: 220e-9, seriesR: 470, inductor: 0.12 })]);
    const dense = logFrequencies(50, 20e3, 4001);
    const widths = [0.6, 0.7, 0.8, 0.9, 1].map((x) => {
      const { re, im } = nodalH(netlistOf(lone, { b: x }), dense);
      const gain = re.map((r, k) => dB({ re: r, im: im[k] }));
      const half = Math.max(...gain) / 2;
      return Math.log2(dense[gain.findLastIndex((g) => g > half)] / dense[gain.findIndex((g) => g > half)]);
    });
    for (let i = 1; i < widths.length; i++) expect(widths[i]).toBeLessThan(widths[i - 1]);
  });
});

describe("peaking section (R. Bristow-Johnson, Audio EQ Cookbook, W3C note)", () => {
  test("a lone ideal R–L–C leg at full boost: (s² + s·A/Q + 1)/(s² + s/(A·Q) + 1), A² = 1 + feedbackR/seriesR", () => {
    const values = fc.record({ seriesC: logUniform(10e-9, 10e-6), seriesR: logUniform(100, 5e3), inductor: logUniform(10e-3, 5), feedbackR: logUniform(1e3, 50e3), ratio: logUniform(0.1, 10) });
    fc.assert(
      fc.property(values, ({ seriesC, seriesR, inductor, feedbackR, ratio }) => {
        const f0 = 1 / (2 * Math.PI * Math.sqrt(inductor * seriesC));
        const amplitude = Math.sqrt(1 + feedbackR / seriesR);
        // H = 1 + feedbackR/Z: the denominator s² + s·R/L + 1/(L·C) gives 1/(A·Q) = seriesR·√(C/L).
        const q = 1 / (amplitude * seriesR * Math.sqrt(seriesC / inductor));
        const cookbook = div({ re: 1 - ratio * ratio, im: (ratio * amplitude) / q }, { re: 1 - ratio * ratio, im: ratio / (amplitude * q) });
        const { re, im } = nodalH(netlistOf(oneBus([bandOf("b", "inductor-section", { seriesC, seriesR, inductor }, { slider: { position: 1 } })], { feedbackR, inputR: feedbackR })), [f0 * ratio]);
        expect(distance({ re: re[0] / OUTPUT_SHARE, im: im[0] / OUTPUT_SHARE }, cookbook)).toBeLessThan(1e-9);
        // And at full cut its inverse, the source's resistance counted in.
        const cut = nodalH(netlistOf(oneBus([bandOf("b", "inductor-section", { seriesC, seriesR, inductor }, { slider: { position: 0 } })], { feedbackR, inputR: feedbackR - SOURCE_R })), [f0 * ratio]);
        expect(distance(mul({ re: cut.re[0], im: cut.im[0] }, cookbook), { re: OUTPUT_SHARE, im: 0 })).toBeLessThan(1e-9);
      }),
      runs(300),
    );
  });
});
