import { BLOCKS } from "../blocks/index.ts";
import type { BlockKind } from "../blocks/kinds.ts";
import { PROJECT_FORMAT, PROJECT_VERSION, type Block, type Part, type Project, type Slider } from "./project.ts";

/** The op amp of a new block. */
const DEFAULT_OP_AMP = "TL072";

/** A block of a kind with its definition's defaults; optional parts are left out. */
export function newBlock(kind: BlockKind, id: string): Block {
  const { roles, hasOpAmp, hasSlider } = BLOCKS[kind];
  const slider: Slider = { track: { value: 10e3, tolerance: 0.2 }, law: "linear", position: 0.5, endR: 0 };
  const parts: Record<string, Part> = {};
  for (const r of roles) if (!r.isOptional) parts[r.role] = { value: r.value, tolerance: r.tolerance };
  return { id, kind, ...(hasOpAmp ? { opAmp: DEFAULT_OP_AMP } : {}), ...(hasSlider ? { slider } : {}), parts };
}

/** What New opens: an input, a stage with an empty bus and an output, wired, on ±15 V. */
export function newProject(): Project {
  return {
    format: PROJECT_FORMAT,
    version: PROJECT_VERSION,
    name: "Untitled board",
    notes: "",
    supply: { kind: "split", positive: 15, negative: 15 },
    temperature: 25,
    blocks: [newBlock("input", "in"), newBlock("boost-cut-stage", "eq"), newBlock("output", "out")],
    wires: [
      { from: "in.out", to: "eq.in" },
      { from: "eq.out", to: "out.in" },
    ],
  };
}
