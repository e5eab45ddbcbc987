import type { BandFigures } from "../../core/analysis/bands.ts";
import type { UnstableEnd } from "../../core/analysis/unstable-ends.ts";
import type { Project, SheetPoint } from "../../core/model/project.ts";
import type { Board } from "../../core/net/board.ts";

/** A response in columns: Hz, dB, degrees. */
export interface Curve {
  readonly frequency: Float64Array;
  readonly gain: Float64Array;
  readonly phase: Float64Array;
}

/** The response as another part would make it, held against the present one. */
export interface Ghost {
  /** What it is with, such as `6n2 C0G 1 %`. */
  readonly label: string;
  readonly total: Curve;
  /** As `alone` of the results; null where that is. */
  readonly alone: Curve | null;
}

/** What the sheet shows of a board's computation. */
export interface SheetResults {
  /** The response with the sliders as they stand. */
  readonly total: Curve;
  /** The selected band only, at full boost or cut (towards its present side; boost when centred), others centred. */
  readonly alone: Curve | null;
  /** By band id. */
  readonly figures: ReadonlyMap<string, BandFigures>;
  /** dB of the total response at each band's in-circuit centre now, by band id. */
  readonly liveGain: ReadonlyMap<string, number>;
  readonly ghost?: Ghost | null;
}

/** The sheet draws what it is given and reports what the hands do; it decides nothing. */
export interface SheetProps {
  readonly project: Project;
  /** Null where the wiring has faults: the blocks are drawn all the same. */
  readonly board: Board | null;
  readonly results: SheetResults | null;
  readonly selection: readonly string[];
  readonly theme: "paper" | "night";
  /** Hz. */
  readonly range: { readonly from: number; readonly to: number };
  /** Draws the phase with its own axis; off where absent. */
  readonly isPhaseShown?: boolean;
  /** The board oscillates: its figures are drawn struck, its curves faded. */
  readonly isVoid?: boolean;
  /** Slider ends at which the board would oscillate: the figures taken there are struck and their bands marked. */
  readonly unstableEnds?: readonly UnstableEnd[];
  /** Pixels at the top that something else lies over: the response begins below it, and the board stays where it is if it can. */
  readonly topInset?: number;
  onSelect(ids: readonly string[], mode: "replace" | "toggle" | "add"): void;
  onKnobStart(id: string): void;
  onKnobMove(id: string, position: number): void;
  onKnobEnd(): void;
  onKnobCancel(): void;
  /** One undo step a drag. */
  onMove(moves: readonly { readonly id: string; readonly at: SheetPoint }[]): void;
  /** Blocks dragged with Alt: copies go to these places, the blocks stay. Absent: they are moved. */
  onDuplicate?(copies: readonly { readonly id: string; readonly at: SheetPoint }[]): void;
  /** Returns what is wrong with the text, or null when it was taken. */
  onEditValue(id: string, role: string, text: string): string | null;
  onContextMenu(at: { readonly clientX: number; readonly clientY: number; readonly target: string | null }): void;
  /** Where the cursor stands, Hz; null where the response has no such frequency. What it reads there changes with the board. */
  onCursor(frequency: number | null): void;
}

/** What the shell may ask of the sheet. */
export interface SheetHandle {
  fit(): void;
  zoomBy(factor: number): void;
  panBy(dx: number, dy: number): void;
  /** Places that put every band back under its own frequency. */
  arrange(): { id: string; at: SheetPoint }[];
  focusBlock(id: string): void;
  editValue(id: string): void;
  /** Page coordinates, or null where it is not on the sheet. */
  screenPlaceOf(id: string, part: "knob" | "block"): { x: number; y: number } | null;
}
