import { useEffect, useRef, useState } from "react";
import { fillingPatch, filledProject } from "../../core/drawer/roles.ts";
import { needsRatingCaution, RATING_CAUTION } from "../../core/drawer/stress.ts";
import type { RankedCandidate } from "../../core/drawer/swap.ts";
import { hasFault } from "../../core/drawer/place-problems.ts";
import { actionById, run } from "../editor/actions/actions.ts";
import { useEditorState, useShell } from "../editor/hooks.ts";
import { Choice } from "../inspector/Choice.tsx";
import { useDrawer, useDrawerState } from "./hooks.ts";
import { counted } from "./line-text.ts";
import { problemMark } from "./ProblemList.tsx";
import { candidateName, effectText, leftText, moneyText, worstText } from "./swap-text.ts";
import { rolesOf, useSwap } from "./use-swap.ts";

/** The command Swap a part looks for it by this. */
const SWAP_ID = "drawer-swap";

/** In the drawer for one of the block's roles: what there is, and what each would do to the board. */
export function SwapSection({ block }: { readonly block: string }) {
  const drawer = useDrawer();
  const board = useEditorState((s) => s.analysis.board);
  const [chosen, setChosen] = useState<string | null>(null);
  const [withPairs, setPairs] = useState(false);
  const info = useDrawerState((s) => s.info);
  const unusable = useDrawerState((s) => s.unusable);
  useEffect(() => drawer.open(), [drawer]);
  const roles = rolesOf(board, block);
  const role = roles.find((one) => one.name === chosen) ?? roles.find((one) => one.kind === "capacitor") ?? roles[0];
  const { swap, isStale, problem } = useSwap(role, withPairs);
  if (!role) return null;
  const canPair = role.kind === "resistor" || role.kind === "capacitor";
  const what = role.label.slice(role.label.lastIndexOf(": ") + 2);
  return (
    <section className="panel-section" aria-label="In the drawer" id={SWAP_ID} tabIndex={-1}>
      <div className="swap-head">
        <h3>In the drawer for</h3>
        <Choice label="Part to look for in the drawer" value={role.name} options={roles.map((one) => ({ value: one.name, label: one.label.slice(one.label.lastIndexOf(": ") + 2) }))} onChoose={setChosen} />
        {canPair && (
          <label className="check">
            <input type="checkbox" checked={withPairs} onChange={(event) => setPairs(event.target.checked)} />
            two parts
          </label>
        )}
      </div>
      {unusable !== null ? (
        <p className="field-error">{unusable.message}</p>
      ) : info !== null && info.lines === 0 ? (
        <OpenHint text="The drawer is empty." />
      ) : problem !== null ? (
        <p className="field-error">{problem}</p>
      ) : swap === null ? (
        <p className="quiet">Looking…</p>
      ) : swap.candidates.length === 0 ? (
        <OpenHint text={`Nothing within 20 % of this ${what} that is free.${canPair && !withPairs ? " Two parts might make it." : ""}`} />
      ) : (
        <Candidates key={role.name} candidates={swap.candidates} role={role} what={what} isStale={isStale} />
      )}
    </section>
  );
}

function OpenHint({ text }: { readonly text: string }) {
  const { context } = useShell();
  return (
    <div className="swap-none">
      <p className="quiet">{text}</p>
      <button type="button" className="button is-small" onClick={() => run(actionById("show-drawer"), context)}>
        Show the drawer
      </button>
    </div>
  );
}

interface CandidatesProps {
  readonly candidates: readonly RankedCandidate[];
  readonly role: { readonly block: string; readonly role: string; readonly label: string };
  readonly what: string;
  readonly isStale: boolean;
}

const FEW = 6;

function Candidates({ candidates, role, what, isStale }: CandidatesProps) {
  const { editor, ui } = useShell().context;
  const [isWhole, setWhole] = useState(false);
  const show = (candidate: RankedCandidate | null): void => {
    ui.patch({ ghost: candidate && { label: candidateName(candidate), change: (project) => filledProject(project, [{ role, filling: candidate.filling }]) } });
  };
  /** The card that has the focus: its ghost comes back when the pointer goes. */
  const focused = useRef<RankedCandidate | null>(null);
  const focus = (candidate: RankedCandidate | null): void => {
    focused.current = candidate;
    show(candidate);
  };
  // A ghost does not outlive the list that it came from.
  useEffect(() => () => ui.patch({ ghost: null }), [ui]);
  const take = (candidate: RankedCandidate): void => {
    const { project } = editor.store.getState();
    editor.apply(`take ${candidateName(candidate)} for ${role.label.replace(": ", ", ")}`, fillingPatch(project, [{ role, filling: candidate.filling }]));
    focus(null);
    ui.notify(`${candidate.lines.map((line) => line.id).join(" and ")} for ${what}.`);
  };
  const shown = isWhole ? candidates : candidates.slice(0, FEW);
  const isCautioned = needsRatingCaution(shown.flatMap((candidate) => candidate.problems));
  return (
    <>
      <ul className={isStale ? "swap-list is-stale" : "swap-list"} onPointerLeave={() => show(focused.current)}>
        {shown.map((candidate) => {
          const name = candidateName(candidate);
          const isBarred = hasFault(candidate);
          return (
            <li key={`${candidate.lines.map((line) => line.id).join(" ")} ${candidate.joined ?? ""}`}>
              <button
                type="button"
                className={`swap-card${candidate.isInPlace ? " is-in-place" : ""}${isBarred ? " is-barred" : ""}`}
                aria-disabled={isBarred || candidate.isInPlace}
                onPointerEnter={() => show(candidate)}
                onFocus={() => focus(candidate)}
                onBlur={() => focus(null)}
                onClick={() => !isBarred && !candidate.isInPlace && take(candidate)}
              >
                <span className="swap-name">{name}</span>
                <span className="swap-left" title="left in stock after building one unit">
                  {leftText(candidate)}
                </span>
                <span className="swap-effect">{effectText(candidate)}</span>
                <span className="swap-worst">
                  {worstText(candidate.worst)} · {candidate.lines.map((line) => line.id).join(" + ")}
                </span>
                <span className="swap-cost">{moneyText(candidate.cost)}</span>
                {candidate.problems.map((problem) => (
                  <span key={problem.message} className={`swap-problem is-${problem.level}`}>
                    {problemMark(problem)} {problem.message}
                  </span>
                ))}
              </button>
            </li>
          );
        })}
      </ul>
      {candidates.length > FEW && (
        <button type="button" className="button is-small is-plain" aria-expanded={isWhole} onClick={() => setWhole(!isWhole)}>
          {isWhole ? "Show fewer" : `Show ${counted(candidates.length - FEW, "more", "more")}`}
        </button>
      )}
      {isCautioned && <p className="caution">{RATING_CAUTION}</p>}
    </>
  );
}
