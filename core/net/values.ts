import { BLOCKS } from "../blocks/index.ts";
import type { PartValues } from "../blocks/definition.ts";
import { FaultError } from "../errors.ts";
import { findOpAmp } from "../model/op-amps.ts";
import { partsOf, type Block, type OpAmpModel, type Part, type Project, type Slider } from "../model/project.ts";

export interface ValueOpts {
  /** Slider positions for this run by band id; the file's where absent. */
  readonly positions?: Readonly<Record<string, number>>;
  /** Take the measured value of a part where it has one. */
  readonly isMeasured?: boolean;
}

/** A part's value for a run: the measured one where it is there and asked for. */
export function partValue(part: Part, opts: ValueOpts): number {
  return opts.isMeasured && part.measured !== undefined ? part.measured : part.value;
}

/** Values of a block's parts by role; an inductor's winding and self-capacitance come along as `windingR` and `selfC`. */
export function blockValues(block: Block, opts: ValueOpts = {}): PartValues {
  const values: Record<string, number> = {};
  const parts = partsOf(block);
  for (const { role } of BLOCKS[block.kind].roles) {
    const part = parts[role];
    if (part) values[role] = partValue(part, opts);
  }
  const coil = parts.inductor;
  if (coil && "inductor" in values) {
    values.windingR = coil.windingR ?? 0;
    values.selfC = coil.selfC ?? 0;
  }
  return values;
}

/** Electrical fraction k of the track for a position x (circuits: linear, or (1 + sgn(u)·|u|^power)/2 with u = 2x − 1). */
export function trackFraction(slider: Pick<Slider, "law">, position: number): number {
  const law = slider.law ?? "linear";
  if (law === "linear") return position;
  const u = 2 * position - 1;
  return (1 + Math.sign(u) * Math.abs(u) ** law.power) / 2;
}

/** The two parts of a slider's track, ohms: `boost` between the m rail and the wiper, `cut` between wiper and p rail. */
export function sliderResistances(slider: Slider, position: number, opts: ValueOpts = {}): { boost: number; cut: number } {
  const track = partValue(slider.track, opts);
  const k = trackFraction(slider, position);
  const endR = slider.endR ?? 0;
  return { boost: track * (1 - k) + endR, cut: track * k + endR };
}

/** The position of a band's slider for a run. */
export function sliderPosition(block: Block, opts: ValueOpts): number {
  const { positions } = opts;
  // A band may be called “constructor”, which every object has something for.
  return positions && Object.hasOwn(positions, block.id) ? positions[block.id] : block.slider!.position;
}

/** The model of a block's op amp. @throws FaultError where the name is unknown */
export function opAmpModel(project: Project, name: string | undefined, path: string): OpAmpModel | "ideal" {
  const model = name === undefined ? undefined : findOpAmp(project, name);
  if (model === undefined) throw new FaultError([{ path, message: `there is no op amp “${name ?? ""}” in this project or in the built-in table` }]);
  return model;
}
