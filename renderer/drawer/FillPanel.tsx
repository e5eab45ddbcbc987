import { useEffect, useMemo, useState } from "react";
import { fillBoard, type FillResult } from "../../core/drawer/fill.ts";
import { filledProject, fillingPatch } from "../../core/drawer/roles.ts";
import { readCeiling } from "../../core/drawer/ceiling.ts";
import type { Money } from "../../core/drawer/stock.ts";
import type { DrawerLine } from "../../core/contract/drawer-schemas.ts";
import type { Board } from "../../core/net/board.ts";
import { useShell } from "../editor/hooks.ts";
import { readCount } from "./columns.ts";
import { reasonOf } from "./drawer-store.ts";
import { useDrawerState } from "./hooks.ts";
import { counted, lineName, percentText } from "./line-text.ts";
import { linesForBoard } from "./stock-query.ts";
import { candidateName, moneysText } from "./swap-text.ts";
import { useBoardAge, useBoardStock } from "./use-board-stock.ts";
import { ProblemList } from "./ProblemList.tsx";
import { TableHead } from "./TableHead.tsx";

interface Wish {
  readonly units: number;
  /** Fraction. */
  readonly window: number;
  readonly keep: boolean;
  readonly ceiling: Money | null;
}

type Outcome = { readonly result: FillResult; readonly board: Board } | { readonly problem: string } | null;

/** What filling changes: the roles that got a line. Roles that keep theirs, and op amps of the same type, stay. */
export function fillingsOf(result: FillResult): Parameters<typeof filledProject>[1] {
  return result.placed.flatMap(({ role, candidate, line }) => {
    if (candidate) return [{ role, filling: candidate.filling }];
    return role.kind === "op-amp" && role.type !== null ? [{ role, filling: { opAmp: role.type, stock: line.id } }] : [];
  });
}

/** Fills the board from the drawer: what would go where and what it does to the response, before anything is changed. */
export function FillPanel() {
  const { context } = useShell();
  const { editor, ui } = context;
  const { found, problem } = useBoardStock(linesForBoard);
  const isEmpty = useDrawerState((s) => s.info !== null && s.info.lines === 0);
  const [wish, setWish] = useState<Wish>({ units: 1, window: 0.2, keep: true, ceiling: null });
  const outcome = useFill(found, wish);
  const result = outcome !== null && "result" in outcome ? outcome.result : null;
  const fillings = useMemo(() => (result ? fillingsOf(result) : []), [result]);
  const { isStale, isOtherModel } = useBoardAge(outcome !== null && "board" in outcome ? outcome.board : null);

  useEffect(() => {
    ui.patch({ ghost: fillings.length === 0 || isOtherModel ? null : { label: "the drawer's parts", change: (project) => filledProject(project, fillings) } });
    return () => ui.patch({ ghost: null });
  }, [ui, fillings, isOtherModel]);

  const close = (): void => ui.patch({ task: null, ghost: null });
  const take = (): void => {
    const patch = fillingPatch(editor.store.getState().project, fillings);
    editor.apply(`fill ${counted(fillings.length, "part")} from the drawer`, patch);
    ui.notify(patch.length === 0 ? "Every part was in its place already." : `Filled ${counted(fillings.length, "part")} from the drawer.`);
    close();
  };

  return (
    <>
      <header className="panel-head">
        <h2>Fill from the drawer</h2>
        <p className="quiet">Nothing is changed until you take it. The dotted curve is the board with the drawer's parts.</p>
      </header>
      <WishForm wish={wish} lines={found?.stock ?? []} onChange={setWish} />
      {(problem !== null || (outcome !== null && "problem" in outcome)) && <p className="field-error">{problem ?? (outcome !== null && "problem" in outcome ? outcome.problem : "")}</p>}
      {isEmpty && <p className="quiet">The drawer is empty: nothing can be placed from it yet.</p>}
      {problem === null && outcome === null && <p className="quiet" role="status">Trying parts…</p>}
      {result && <FillReport result={result} hasCeiling={wish.ceiling !== null} />}
      <div className="button-row panel-foot">
        <button type="button" className="button is-primary" disabled={fillings.length === 0 || isStale} onClick={take}>
          Take {counted(fillings.length, "part")}
        </button>
        <button type="button" className="button" onClick={close}>
          Leave it as it is
        </button>
      </div>
    </>
  );
}

/** Works the filling out after a pause, so that what the panel says of it is on the screen first. */
function useFill(found: { readonly board: Board; readonly stock: readonly DrawerLine[] } | null, wish: Wish): Outcome {
  const [outcome, setOutcome] = useState<Outcome>(null);
  useEffect(() => {
    if (!found) return undefined;
    const timer = setTimeout(() => {
      try {
        const lines = found.stock.filter((line) => !line.retired);
        const { ceiling, ...rest } = wish;
        setOutcome({ result: fillBoard(found.board, lines, { ...rest, ...(ceiling ? { ceiling } : {}) }), board: found.board });
      } catch (error) {
        setOutcome({ problem: reasonOf(error) });
      }
    }, 60);
    return () => clearTimeout(timer);
  }, [found, wish]);
  return outcome;
}

function WishForm({ wish, lines, onChange }: { readonly wish: Wish; readonly lines: readonly DrawerLine[]; readonly onChange: (wish: Wish) => void }) {
  const [texts, setTexts] = useState({ units: "1", window: "20", ceiling: "" });
  const [problem, setProblem] = useState<string | null>(null);
  const read = (next: typeof texts): void => {
    setTexts(next);
    const units = readCount(next.units);
    const window = Number(next.window.replace("%", "").replace(",", ".").trim());
    const ceiling = next.ceiling.trim() === "" ? null : readCeiling(next.ceiling, lines);
    if (!units.ok || units.count < 1 || units.count > 100_000) setProblem("Units: a whole number from 1 on.");
    else if (!(window >= 0 && window <= 100)) setProblem("Values within: 0 to 100 %.");
    else if (ceiling?.ok === false) setProblem(`Most a unit may cost: ${ceiling.message}.`);
    else {
      setProblem(null);
      onChange({ ...wish, units: units.count, window: window / 100, ceiling: ceiling?.value ?? null });
    }
  };
  return (
    <div className="wish-form">
      <label>
        units
        <input className="text-input is-small" inputMode="numeric" value={texts.units} onChange={(event) => read({ ...texts, units: event.target.value })} />
      </label>
      <label>
        values within
        <input className="text-input is-small" value={texts.window} aria-label="Values within, percent" onChange={(event) => read({ ...texts, window: event.target.value })} />%
      </label>
      <label>
        at most a unit
        <input className="text-input is-small" placeholder="any" aria-label="Most that a unit may cost, such as 25 EUR" value={texts.ceiling} onChange={(event) => read({ ...texts, ceiling: event.target.value })} />
      </label>
      <label className="check">
        <input type="checkbox" checked={wish.keep} onChange={(event) => onChange({ ...wish, keep: event.target.checked })} />
        keep lines that are named already
      </label>
      {problem !== null && <p className="field-error">{problem}</p>}
    </div>
  );
}

function FillReport({ result, hasCeiling }: { readonly result: FillResult; readonly hasCeiling: boolean }) {
  const { placed, unplaced, error, worst } = result;
  const total = placed.length + unplaced.length;
  const cautions = placed.flatMap(({ role, line, problems }) => problems.map((problem) => ({ role, line, problem })));
  return (
    <div className="report" aria-label="Report" role="region">
      <dl className="report-figures">
        <div>
          <dt>placed</dt>
          <dd data-testid="fill-placed">
            {placed.length} of {total}
          </dd>
        </div>
        <div>
          <dt>response departs by</dt>
          <dd>{error < 0.0005 ? "nothing" : `${error.toFixed(3)} dB rms, ${worst.toFixed(2)} dB at most`}</dd>
        </div>
        <div>
          <dt>parts of a unit cost</dt>
          <dd>{moneysText(result.cost)}</dd>
        </div>
      </dl>
      <p className="hint">
        {result.isExhaustive ? "Every way to fill the board was tried: none comes nearer." : "The best of many ways that were tried."}
        {hasCeiling && !result.isWithinCeiling ? " Even the cheapest parts cost more than allowed." : ""}
      </p>
      {unplaced.length > 0 && (
        <>
          <h3>Not placed ({unplaced.length})</h3>
          <ul className="report-list">
            {unplaced.map(({ role, reason }) => (
              <li key={role.name}>
                <strong>{role.label}</strong>: {reason}
              </li>
            ))}
          </ul>
        </>
      )}
      {cautions.length > 0 && (
        <>
          <h3>To weigh</h3>
          <ProblemList found={cautions} />
        </>
      )}
      {placed.length > 0 && (
        <>
          <h3>Placed</h3>
          <table className="list-table">
            <TableHead columns={["place", "part", { figure: "off" }, { figure: "left" }]} />
            <tbody>
              {placed.map(({ role, line, candidate, left }) => (
                <tr key={role.name}>
                  <td>{role.label}</td>
                  <td title={(candidate?.lines ?? [line]).map((one) => one.id).join(" + ")}>{candidate === null ? lineName(line) : candidateName(candidate)}</td>
                  <td className="is-number">{candidate === null ? (role.kind === "op-amp" ? "" : "kept") : percentText(candidate.deviation)}</td>
                  <td className="is-number">{left}</td>
                </tr>
              ))}
            </tbody>
          </table>
        </>
      )}
    </div>
  );
}
