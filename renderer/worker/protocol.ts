import * as v from "valibot";
import { PROJECT_FORMAT, type Project } from "../../core/model/project.ts";

/** A document comes from the editor, which holds only checked ones: that it is one at all is enough here. */
const project = v.custom<Project>((value) => typeof value === "object" && value !== null && (value as { format?: unknown }).format === PROJECT_FORMAT);

const root = { re: v.number(), im: v.number() };

const pole = v.object({ ...root, block: v.string(), shares: v.array(v.object({ source: v.string(), share: v.number() })) });

const loop = v.object({
  source: v.string(),
  block: v.string(),
  phaseMargin: v.nullable(v.number()),
  crossover: v.nullable(v.number()),
  gainMargin: v.nullable(v.number()),
  phaseCrossing: v.nullable(v.number()),
});

const stability = v.object({
  poles: v.array(pole),
  zeros: v.array(v.object(root)),
  reproducedWithin: v.number(),
  unstable: v.array(pole),
  loops: v.array(loop),
});

const account = v.object({
  id: v.string(),
  isolatedBoost: v.number(),
  peak: v.number(),
  whole: v.number(),
  own: v.number(),
  shares: v.array(v.object({ id: v.string(), label: v.string(), loss: v.number() })),
});

const ends = v.array(v.object({ id: v.string(), end: v.picklist(["boost", "cut"]) }));

/** What the screen asks: everything that it wants of one document. `key` comes back with every answer. */
export const REQUEST = v.object({
  key: v.number(),
  project,
  isStabilityWanted: v.boolean(),
  areEndsWanted: v.boolean(),
  /** The band whose loss account is wanted, or null. */
  accountOf: v.nullable(v.string()),
});

/** What comes back, one message a result and `done` at the end; `failed` stands for the result that it names. */
export const ANSWER = v.variant("type", [
  v.object({ type: v.literal("stability"), key: v.number(), stability }),
  v.object({ type: v.literal("account"), key: v.number(), account }),
  v.object({ type: v.literal("ends"), key: v.number(), ends }),
  v.object({ type: v.literal("failed"), key: v.number(), what: v.picklist(["stability", "account", "ends"]), message: v.string() }),
  v.object({ type: v.literal("done"), key: v.number() }),
]);

export type Request = v.InferOutput<typeof REQUEST>;
export type Answer = v.InferOutput<typeof ANSWER>;
/** Natural frequencies and loops of a document with its sliders as they stand. */
export type Stability = v.InferOutput<typeof stability>;
/** The slider ends at which the board oscillates, other sliders centred. */
export type Ends = v.InferOutput<typeof ends>;
/** How a band's isolated boost becomes its boost in circuit, dB. */
export type Account = v.InferOutput<typeof account>;
