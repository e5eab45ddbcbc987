import { smallestMargin } from "../../core/analysis/stability.ts";
import { BLOCKS } from "../../core/blocks/index.ts";
import { blockName } from "../../core/model/edit.ts";
import type { Project } from "../../core/model/project.ts";
import { actionById, run } from "../editor/actions/actions.ts";
import { useEditorState, useShell } from "../editor/hooks.ts";
import { useIsUnstable, useStability, useUnstableEnds } from "../worker/hooks.ts";
import type { Ends } from "../worker/protocol.ts";

/** What people call a block of the analysis; the divider of a single supply is no block of the file. */
export function nameOfBlock(project: Project, id: string): string {
  const block = project.blocks.find((b) => b.id === id);
  if (!block) return id === "reference" ? "signal reference" : id;
  // The only block of its kind goes by its kind, as on the sheet: that says more than an id. Bands go by their id there.
  const isOnly = BLOCKS[block.kind].place !== "band" && project.blocks.filter((b) => b.kind === block.kind).length === 1;
  return block.label === undefined && isOnly ? BLOCKS[block.kind].label : blockName(block);
}

/** The smallest phase margin of the board, or that it oscillates and where. */
export function StabilityStatus() {
  const { context } = useShell();
  const project = useEditorState((s) => s.project);
  const hasBoard = useEditorState((s) => s.analysis.board !== null);
  const { value, isCurrent, failure } = useStability();
  const ends = useUnstableEnds();
  // Faulty wiring leaves no loops to judge.
  if (!hasBoard) return null;
  if (failure !== null) {
    return (
      <span className="status-caution is-kept" data-testid="stability" title={failure}>
        loop margins not known
      </span>
    );
  }
  if (value === null) {
    return (
      <span className="quiet" data-testid="stability" aria-busy="true">
        loop margins: computing…
      </span>
    );
  }
  const className = isCurrent ? "status-margin" : "status-margin is-stale";
  if (value.unstable.length > 0) {
    return (
      <button type="button" className="status-button is-warning is-unstable" data-testid="stability" aria-busy={!isCurrent} onClick={() => run(actionById("show-poles"), context)}>
        <WarningSign />
        {`unstable: the loop of ${loopNames(project, value.unstable)}`}
        {!isCurrent && " · computing…"}
      </button>
    );
  }
  const least = smallestMargin(value.loops);
  if (ends.length > 0) {
    return (
      <button type="button" className="status-button is-warning is-unstable" data-testid="stability" aria-busy={!isCurrent} onClick={() => run(actionById("show-poles"), context)}>
        <WarningSign />
        {`unstable with ${endText(project, ends[0])}${ends.length > 1 ? ` and ${ends.length - 1} more` : ""}`}
        {!isCurrent && " · computing…"}
      </button>
    );
  }
  return (
    <span className={className} data-testid="stability" aria-busy={!isCurrent} title={least ? `Where the loop gain of the op amp in “${nameOfBlock(project, least.block)}” passes 1` : undefined}>
      {least ? `smallest phase margin ${least.phaseMargin.toFixed(0)}° (${nameOfBlock(project, least.block)})` : "ideal op amps: no loop to judge"}
      {!isCurrent && " · computing…"}
    </span>
  );
}

/** “4 kHz” at full boost */
export function endText(project: Project, { id, end }: Ends[number]): string {
  return `“${nameOfBlock(project, id)}” at full ${end}`;
}

/** “Octave bus” and “4 kHz”: the blocks whose loops oscillate. */
function loopNames(project: Project, unstable: readonly { readonly block: string }[]): string {
  const names = [...new Set(unstable.map(({ block }) => `“${nameOfBlock(project, block)}”`))];
  return names.length < 2 ? names.join("") : `${names.slice(0, -1).join(", ")} and ${names.at(-1)!}`;
}

interface UnstableBannerProps {
  /** What still holds, where something does. */
  readonly but?: string;
}

/** Stands over figures that an oscillating board makes meaningless; nothing while the board is at peace. */
export function UnstableBanner({ but = "" }: UnstableBannerProps) {
  const isUnstable = useIsUnstable();
  return isUnstable ? <Banner but={but} /> : null;
}

function Banner({ but }: Required<UnstableBannerProps>) {
  const { context } = useShell();
  const project = useEditorState((s) => s.project);
  const { value } = useStability();
  return (
    <div className="unstable-banner" role="alert">
      <WarningSign />
      <p>
        <strong>Unstable:</strong> a pole lies in the right half plane, in the loop of {loopNames(project, value?.unstable ?? [])}. The board oscillates: no figure here means anything. {but}
      </p>
      <button type="button" className="button is-small" onClick={() => run(actionById("show-poles"), context)}>
        Show the poles
      </button>
    </div>
  );
}

/** A triangle with a mark of exclamation. */
export function WarningSign() {
  return (
    <svg className="warning-sign" viewBox="0 0 18 16" aria-hidden="true">
      <path d="M9 1 17 15H1Z" />
      <path d="M9 6v4.5M9 12.6v.2" />
    </svg>
  );
}
