import { useCallback, useMemo } from "react";
import type { Board } from "../../core/net/board.ts";
import { useEditorState, useShell } from "../editor/hooks.ts";
import { endText, nameOfBlock, WarningSign } from "../panels/Stability.tsx";
import { useStability, useUnstableEnds } from "../worker/hooks.ts";
import type { Stability } from "../worker/protocol.ts";
import { PolePlane } from "./PolePlane.tsx";
import { loopRows, rootRows, withinText, type RootRow } from "./roots-model.ts";
import { RootsTable } from "./RootsTable.tsx";

/** Natural frequencies of the whole board and the loops of its op amps, with the sliders as they stand. */
export function PolesPage({ board }: { readonly board: Board }) {
  const { value, isCurrent, failure } = useStability();
  const isComputing = !isCurrent && failure === null;
  return (
    <article className={isCurrent ? "equations-article" : "equations-article is-stale"} aria-label="Poles, zeros and loops" aria-busy={isComputing}>
      <header className="equations-head">
        <div>
          <h2>Poles, zeros and loops</h2>
          <p className="quiet">
            The whole board, op amps included, with the sliders as they stand.
            {isComputing && <span className="computing"> Computing…</span>}
          </p>
        </div>
      </header>
      {failure !== null && (
        <p className="caution" role="alert">
          There are no poles to show: {failure}
        </p>
      )}
      {value && failure === null && <Roots board={board} stability={value} />}
    </article>
  );
}

interface RootsProps {
  readonly board: Board;
  readonly stability: Stability;
}

function Roots({ board, stability }: RootsProps) {
  const { editor } = useShell().context;
  const selection = useEditorState((s) => s.selection);
  const ends = useUnstableEnds();
  const { project } = board;
  const nameOf = useCallback((id: string) => nameOfBlock(project, id), [project]);
  const rows = useMemo(() => rootRows(stability), [stability]);
  const onPick = useCallback(
    (row: RootRow) => {
      // The divider of the supply is no block of the file: there is nothing to select.
      if (row.block !== null && editor.store.getState().project.blocks.some((b) => b.id === row.block)) editor.select([row.block]);
    },
    [editor],
  );
  const { poles, zeros, reproducedWithin, loops } = stability;
  return (
    <>
      <section className="equations-section" aria-label="The s-plane">
        <h3>
          <span aria-hidden="true">× </span>poles and <span aria-hidden="true">○ </span>zeros in the s-plane, unrolled
        </h3>
        <PolePlane rows={rows} selected={selection} nameOf={nameOf} onPick={onPick} />
        <p data-testid="reproduced">Together they give the response back within {withinText(reproducedWithin)} from 10 Hz to 100 kHz.</p>
        <p className="hint">
          Across: the logarithm of the distance from the origin. Up: the angle from the negative real axis, read as damping ζ. Below the dashed edge what is set going dies away; a pole above it grows. Of a complex
          pair one is drawn; real roots stand in two lanes, poles above zeros, so that pairs can be told apart. Ringed: the poles of the selected block.
        </p>
      </section>
      <section className="equations-section" aria-label="Loops">
        <h3>Loops</h3>
        {ends.length > 0 && (
          <p className="void-note">
            <WarningSign /> The board oscillates with {ends.map((end) => endText(project, end)).join(", ")}, other sliders centred.
          </p>
        )}
        {loops.length === 0 ? <p className="quiet">Every op amp here is ideal: there is no loop to judge.</p> : <LoopsTable stability={stability} nameOf={nameOf} selected={selection} />}
      </section>
      <section className="equations-section" aria-label="Table of poles and zeros">
        <h3>
          {poles.length} poles, {zeros.length} zeros
        </h3>
        <RootsTable rows={rows} selected={selection} nameOf={nameOf} onPick={onPick} />
      </section>
    </>
  );
}

interface LoopsTableProps {
  readonly stability: Stability;
  readonly nameOf: (id: string) => string;
  readonly selected: readonly string[];
}

function LoopsTable({ stability, nameOf, selected }: LoopsTableProps) {
  const { editor } = useShell().context;
  const blocks = useEditorState((s) => s.project.blocks);
  const rows = useMemo(() => loopRows(stability.loops), [stability]);
  return (
    <div className="table-scroll">
      <table className="plain-table is-circuit-figure" aria-label="Loops">
        <thead>
          <tr>
            <th scope="col">op amp of</th>
            <th scope="col" className="is-text">
              type
            </th>
            <th scope="col">phase margin</th>
            <th scope="col" title="Where the loop gain passes 1">
              crossover
            </th>
            <th scope="col">gain margin</th>
            <th scope="col" title="Where the loop gain turns by 180°">
              at 180°
            </th>
          </tr>
        </thead>
        <tbody>
          {rows.map((row) => {
            const block = blocks.find((b) => b.id === row.block);
            return (
              <tr key={row.source} className={selected.includes(row.block) ? "is-selected" : undefined} data-loop={row.block}>
                <th scope="row">
                  {block ? (
                    <button type="button" className="link-button" aria-pressed={selected.includes(row.block)} onClick={() => editor.select([row.block])}>
                      {nameOf(row.block)}
                    </button>
                  ) : (
                    nameOf(row.block)
                  )}
                </th>
                <td className="is-text">{block?.opAmp ?? ""}</td>
                <td>
                  {row.isSmallest && <span className="quiet">smallest </span>}
                  {row.phaseMargin}
                </td>
                <td>{row.crossover}</td>
                <td>{row.gainMargin}</td>
                <td>{row.phaseCrossing}</td>
              </tr>
            );
          })}
        </tbody>
      </table>
    </div>
  );
}
