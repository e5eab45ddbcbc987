/**
 * Times the solvers on the ten-band handbook table (test/helpers/boards.ts) in one process and prints milliseconds and
 * ratios: `npm run bench`, `npm run -s bench -- --json`. Medians of many runs after a warm-up; no test depends on it.
 */
import { cpus } from "node:os";
import { parseArgs } from "node:util";
import { complex, lusolve, type Complex } from "mathjs";
import { lossAccount } from "../../core/analysis/interaction.ts";
import { polesAndZeros } from "../../core/analysis/poles.ts";
import { angular, logFrequencies } from "../../core/analysis/response.ts";
import { loopMargins } from "../../core/analysis/stability.ts";
import { resolveBoard, type Board } from "../../core/net/board.ts";
import { expandBoard } from "../../core/net/expand.ts";
import { describeNetlist, nodalTransfer } from "../../core/net/nodal.ts";
import { compileBoard, Sweep } from "../../core/net/star.ts";
import { transferColumns } from "../../core/net/transfer.ts";
import { gyratorBoard, tenBandBoard } from "../helpers/boards.ts";
import { benchChoose } from "./choose.ts";
import { benchDrawer } from "./drawer.ts";

const POINTS = 481;
const omega = angular(logFrequencies(10, 40_000, POINTS));

/** Median time of a call, ms. */
function median(runs: number, warmUp: number, call: () => void): number {
  for (let i = 0; i < warmUp; i++) call();
  const times = Array.from({ length: runs }, () => {
    const start = performance.now();
    call();
    return performance.now() - start;
  });
  return times.sort((a, b) => a - b)[runs >> 1];
}

function starMs(board: Board): number {
  const out = transferColumns(POINTS, false);
  const compiled = compileBoard(board);
  // A full response: every leg, every slider, every frequency.
  return median(400, 200, () => new Sweep(compiled, omega).run(compiled.positions, out));
}

function sliderMs(board: Board): number {
  const out = transferColumns(POINTS, false);
  const compiled = compileBoard(board);
  const sweep = new Sweep(compiled, omega);
  const positions = compiled.positions.slice();
  let step = 0;
  return median(400, 200, () => {
    positions[5] = (step++ % 100) / 100;
    sweep.run(positions, out);
  });
}

function nodalMs(board: Board): number {
  const out = transferColumns(POINTS, false);
  const netlist = expandBoard(board);
  return median(7, 1, () => nodalTransfer(netlist, omega, out));
}

/** mathjs on the same matrices: building its matrix objects is not counted, solving is. */
function mathjsMs(board: Board): { readonly ms: number; readonly unknowns: number } {
  const { size, conductance, storage, excitation } = describeNetlist(expandBoard(board));
  const right = Array.from(excitation, (b) => [complex(b, 0)]);
  let total = 0;
  for (const w of omega) {
    const rows: Complex[][] = Array.from({ length: size }, (_row, i) => Array.from({ length: size }, (_column, j) => complex(conductance[i * size + j], w * storage[i * size + j])));
    const start = performance.now();
    lusolve(rows, right);
    total += performance.now() - start;
  }
  return { ms: total, unknowns: size };
}

const { values } = parseArgs({ options: { json: { type: "boolean" } } });
const tenBands = resolveBoard(tenBandBoard());
const star = starMs(tenBands);
const slider = sliderMs(tenBands);
const nodal = nodalMs(tenBands);
const reference = mathjsMs(tenBands);
const thirtyOneBands = resolveBoard(gyratorBoard(31));
const poles = { tenMs: median(60, 10, () => polesAndZeros(tenBands)), thirtyOneMs: median(9, 2, () => polesAndZeros(thirtyOneBands)) };
const margins = { tenMs: median(60, 10, () => loopMargins(tenBands)), thirtyOneMs: median(9, 2, () => loopMargins(thirtyOneBands)) };
const account = { tenMs: median(30, 5, () => lossAccount(tenBands, "b1000")), thirtyOneMs: median(9, 2, () => lossAccount(thirtyOneBands, "b16")) };
const growth = [10, 20, 31, 62].map((bands) => ({ bands, starMs: starMs(resolveBoard(gyratorBoard(bands))) }));
const choose = benchChoose(median);
const drawer = await benchDrawer(median);

if (values.json) {
  process.stdout.write(`${JSON.stringify({ tenBands: { points: POINTS, starMs: star, sliderMs: slider, nodalMs: nodal, mathjsMs: reference.ms }, growth, poles, margins, account, choose, drawer }, null, 2)}\n`);
} else {
  const row = (what: string, ms: number): string => `| ${what} | ${ms < 10 ? ms.toFixed(3) : ms.toFixed(0)} | ${(ms / star).toFixed(ms / star < 10 ? 2 : 0)} |`;
  const lines = [
    `${cpus()[0]?.model ?? "unknown processor"}, ${cpus().length} cores, Node ${process.versions.node}`,
    "",
    `Ten gyrator bands with real op amps, ${POINTS} points, ${reference.unknowns} unknowns:`,
    "",
    "| what | ms | ratio |",
    "| --- | ---: | ---: |",
    row("star reduction, full response", star),
    row("star reduction, a slider move", slider),
    row("nodal solver", nodal),
    row("mathjs `lusolve`, same matrices", reference.ms),
    "",
    "| bands | ms | ms a band |",
    "| ---: | ---: | ---: |",
    ...growth.map(({ bands, starMs: ms }) => `| ${bands} | ${ms.toFixed(3)} | ${(ms / bands).toFixed(4)} |`),
    "",
    "| analysis | ten bands, ms | 31 bands, ms |",
    "| --- | ---: | ---: |",
    ...([["poles and zeros", poles], ["loop margins", margins], ["account of one band's loss", account]] as const).map(([what, { tenMs, thirtyOneMs }]) => `| ${what} | ${tenMs.toFixed(1)} | ${thirtyOneMs.toFixed(0)} |`),
    "",
    "| choosing parts | ms |",
    "| --- | ---: |",
    ...choose.map(({ what, ms }) => `| ${what} | ${ms.toFixed(1)} |`),
    "",
    "| the drawer with 100 000 lines | ms |",
    "| --- | ---: |",
    ...drawer.map(({ what, ms }) => `| ${what} | ${ms.toFixed(1)} |`),
  ];
  process.stdout.write(`${lines.join("\n")}\n`);
}
