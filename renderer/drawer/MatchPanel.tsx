import { useEffect, useMemo } from "react";
import { matchPieces, type MatchResult } from "../../core/drawer/match.ts";
import { filledProject, fillingPatch } from "../../core/drawer/roles.ts";
import { QUANTITY_OF } from "../../core/drawer/check-line.ts";
import { formatValue } from "../../core/units.ts";
import { actionById, run } from "../editor/actions/actions.ts";
import { useShell } from "../editor/hooks.ts";
import { reasonOf } from "./drawer-store.ts";
import { counted, percentText } from "./line-text.ts";
import { piecesForBoard } from "./stock-query.ts";
import { useBoardAge, useBoardStock } from "./use-board-stock.ts";
import { TableHead } from "./TableHead.tsx";

type Fillings = Parameters<typeof filledProject>[1];

/** What matching writes: the measured value and the piece, beside the nominal value. */
export function measuredFillings(result: MatchResult): Fillings {
  return result.matched.map(({ role, piece }) => ({ role, filling: { part: { ...role.part!, measured: piece.value, piece: piece.id } } }));
}

/** The same pieces as if they were the values, for the curve: it shows what will be soldered in. */
function valuedFillings(result: MatchResult): Fillings {
  return result.matched.map(({ role, piece }) => ({ role, filling: { part: { ...role.part!, value: piece.value } } }));
}

/** Deals the pieces that were measured to the places where they do most good, and says what that is worth, before anything is changed. */
export function MatchPanel() {
  const { context } = useShell();
  const { editor, ui } = context;
  const { found, problem } = useBoardStock(piecesForBoard);
  const outcome = useMemo((): { readonly result: MatchResult } | { readonly problem: string } | null => {
    if (!found) return null;
    try {
      return { result: matchPieces(found.board, found.stock) };
    } catch (error) {
      return { problem: reasonOf(error) };
    }
  }, [found]);
  const result = outcome !== null && "result" in outcome ? outcome.result : null;
  const { isStale, isOtherModel } = useBoardAge(found?.board ?? null);
  const trouble = problem ?? (outcome !== null && "problem" in outcome ? outcome.problem : null);

  useEffect(() => {
    ui.patch({ ghost: result === null || result.matched.length === 0 || isOtherModel ? null : { label: "the measured pieces", change: (project) => filledProject(project, valuedFillings(result)) } });
    return () => ui.patch({ ghost: null });
  }, [ui, result, isOtherModel]);

  const close = (): void => ui.patch({ task: null, ghost: null });
  const take = (): void => {
    if (!result) return;
    editor.apply(`match ${counted(result.matched.length, "measured piece")}`, fillingPatch(editor.store.getState().project, measuredFillings(result)));
    ui.notify(`Matched ${counted(result.matched.length, "measured piece")}.`);
    close();
  };

  return (
    <>
      <header className="panel-head">
        <h2>Match measured pieces</h2>
        <p className="quiet">Pieces that you measured go where the board needs them most. Nothing is changed until you take it.</p>
      </header>
      {trouble !== null && <p className="field-error">{trouble}</p>}
      {trouble === null && result === null && <p className="quiet" role="status">Dealing…</p>}
      {result && result.matched.length === 0 && (
        <>
          <p>No measured piece fits a place of this board. Two things are needed: places that name a stock line, and measured pieces of that line.</p>
          <div className="button-row">
            <button type="button" className="button is-small" onClick={() => run(actionById("drawer-fill"), context)}>
              Fill from the drawer…
            </button>
            <button type="button" className="button is-small" onClick={() => run(actionById("show-drawer"), context)}>
              Measure pieces in the drawer
            </button>
          </div>
        </>
      )}
      {result && <MatchReport result={result} />}
      <div className="button-row panel-foot">
        <button type="button" className="button is-primary" disabled={!result || result.matched.length === 0 || isStale} onClick={take}>
          Take {counted(result?.matched.length ?? 0, "piece")}
        </button>
        <button type="button" className="button" onClick={close}>
          Leave it as it is
        </button>
      </div>
    </>
  );
}

function MatchReport({ result }: { readonly result: MatchResult }) {
  const { matched, unmatched, error, random } = result;
  return (
    <div className="report" role="region" aria-label="Report">
      {matched.length > 0 && (
        <>
          <dl className="report-figures">
            <div>
              <dt>off the design</dt>
              <dd>{error.toFixed(3)} dB rms</dd>
            </div>
            {random && (
              <div>
                <dt>picked blindly, {random.deals} times</dt>
                <dd>
                  {random.median.toFixed(3)} dB as a rule, {random.best.toFixed(3)} dB at best
                </dd>
              </div>
            )}
          </dl>
          <table className="list-table">
            <TableHead columns={["place", "piece", { figure: "measured" }, { figure: "off" }]} />
            <tbody>
              {matched.map(({ role, piece, deviation }) => {
                const quantity = QUANTITY_OF[role.kind];
                return (
                  <tr key={role.name}>
                    <td>{role.label}</td>
                    <td>
                      {piece.mark}
                      <span className="list-note">{piece.line}</span>
                    </td>
                    <td className="is-number">{quantity === null ? "" : formatValue(piece.value, quantity, { significant: 4 })}</td>
                    <td className="is-number">{percentText(deviation)}</td>
                  </tr>
                );
              })}
            </tbody>
          </table>
        </>
      )}
      {unmatched.length > 0 && (
        <details className="report-details">
          <summary>Without a piece ({unmatched.length})</summary>
          <ul className="report-list">
            {unmatched.map(({ role, reason }) => (
              <li key={role.name}>
                <strong>{role.label}</strong>: {reason}
              </li>
            ))}
          </ul>
        </details>
      )}
    </div>
  );
}
