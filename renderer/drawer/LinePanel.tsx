import { Tabs } from "@base-ui/react/tabs";
import { useCallback, useEffect, useState } from "react";
import type { ResultOf } from "../../core/contract/methods.ts";
import type { LedgerEntry } from "../../core/contract/drawer-schemas.ts";
import { actionById, run } from "../editor/actions/actions.ts";
import { useShell } from "../editor/hooks.ts";
import { FieldForm } from "./FieldForm.tsx";
import { reasonOf } from "./drawer-store.ts";
import { useDrawer, useDrawerState } from "./hooks.ts";
import { counted, KIND_NAMES, lineName, momentText } from "./line-text.ts";
import { PieceList } from "./PieceList.tsx";
import { chosenCount } from "./selection.ts";
import { TableHead } from "./TableHead.tsx";

type LineDetail = ResultOf<"drawer.line">;

/** What is in hand, in full: one line with its ledger and pieces, or the fields that several are to share. */
export function LinePanel() {
  const chosen = useDrawerState((s) => s.chosen);
  const total = useDrawerState((s) => s.total) ?? 0;
  useDrawerState((s) => s.seen);
  useDrawerState((s) => s.at);
  const drawer = useDrawer();
  const line = drawer.lineInHand();
  const count = chosenCount(chosen, total);
  if (count > 1) return <ManyLines count={count} />;
  const only = count === 1 && chosen.mode === "some" ? [...chosen.ids][0] : line?.id;
  if (only === undefined) {
    return (
      <header className="panel-head">
        <h2>No line in hand</h2>
        <p className="quiet">Pick a line of the table to see its ledger and its measured pieces.</p>
      </header>
    );
  }
  return <OneLine key={only} id={only} />;
}

function ManyLines({ count }: { readonly count: number }) {
  const { context } = useShell();
  const drawer = useDrawer();
  const kinds = useDrawerState((s) => s.filter.kind);
  return (
    <>
      <header className="panel-head">
        <h2>{counted(count, "line")} chosen</h2>
        <p className="quiet">What is filled in here is set on all of them at once, as one step. Empty fields stay as they are.</p>
      </header>
      <FieldForm
        kind={kinds.length === 1 ? kinds[0] : null}
        action={`Set on ${counted(count, "line")}`}
        onTake={async (fields) => {
          await drawer.editLines(await drawer.chosenIds(), fields);
        }}
      />
      <div className="button-row">
        <button type="button" className="button is-small" onClick={() => run(actionById("drawer-move"), context)}>
          Book a movement…
        </button>
        <button type="button" className="button is-small" onClick={() => run(actionById("drawer-retire"), context)}>
          Take out of use
        </button>
        <button type="button" className="button is-small is-plain" onClick={() => run(actionById("drawer-choose-none"), context)}>
          Choose none
        </button>
      </div>
    </>
  );
}

/** A line with everything that is known of it, followed as the drawer changes. */
function useDetail(id: string): { readonly detail: LineDetail | null; readonly problem: string | null } {
  const drawer = useDrawer();
  const [state, setState] = useState<{ readonly detail: LineDetail | null; readonly problem: string | null }>({ detail: null, problem: null });
  useEffect(() => {
    let isCurrent = true;
    const read = (): void => {
      drawer.host.call("drawer.line", { id }).then(
        (detail) => isCurrent && setState({ detail, problem: null }),
        (error: unknown) => isCurrent && setState({ detail: null, problem: reasonOf(error) }),
      );
    };
    // Walking down the table with a key held down asks for the last line only.
    const timer = setTimeout(read, 60);
    const stop = drawer.host.on("drawer.changed", read);
    return () => {
      isCurrent = false;
      clearTimeout(timer);
      stop();
    };
  }, [drawer, id]);
  return state;
}

function OneLine({ id }: { readonly id: string }) {
  const { context } = useShell();
  const drawer = useDrawer();
  const { detail, problem } = useDetail(id);
  if (problem !== null) return <p className="field-error">{problem}</p>;
  if (detail === null) return <h2>{id}</h2>;
  const { line, holders, pieces, history } = detail;
  const free = line.quantity - line.reserved;
  return (
    <>
      <header className="panel-head">
        <h2>{line.id}</h2>
        <p className="quiet">
          {KIND_NAMES[line.kind].one} · {lineName(line)}
          {line.retired ? " · out of use" : ""}
        </p>
      </header>
      <p className="line-stock">
        <strong>{line.quantity}</strong> there, <strong>{line.reserved}</strong> reserved, <strong>{free}</strong> free
      </p>
      {holders.length > 0 && <p className="hint">Held by {holders.map((holder) => `${holder.reference} (${holder.count})`).join(", ")}.</p>}
      <div className="button-row">
        <button type="button" className="button is-small" onClick={() => run(actionById("drawer-move"), context)}>
          Book a movement…
        </button>
        <button type="button" className="button is-small" onClick={() => void drawer.retireLines([id], !line.retired).catch((error: unknown) => context.ui.notify(reasonOf(error), true))}>
          {line.retired ? "Put back into use" : "Take out of use"}
        </button>
      </div>
      <Tabs.Root defaultValue="fields" className="panel-tabs">
        <Tabs.List className="tab-list" aria-label={`About ${line.id}`}>
          <Tabs.Tab value="fields" className="tab">
            Fields
          </Tabs.Tab>
          <Tabs.Tab value="ledger" className="tab">
            Ledger
          </Tabs.Tab>
          <Tabs.Tab value="pieces" className="tab">
            Pieces{pieces.length > 0 ? ` (${pieces.length})` : ""}
          </Tabs.Tab>
          <Tabs.Tab value="history" className="tab">
            Changes
          </Tabs.Tab>
        </Tabs.List>
        <Tabs.Panel value="fields">
          <LineFields line={line} />
        </Tabs.Panel>
        <Tabs.Panel value="ledger">
          <Ledger id={id} />
        </Tabs.Panel>
        <Tabs.Panel value="pieces">
          <PieceList line={line} pieces={pieces} />
        </Tabs.Panel>
        <Tabs.Panel value="history">
          <Changes history={history} />
        </Tabs.Panel>
      </Tabs.Root>
    </>
  );
}

function LineFields({ line }: { readonly line: LineDetail["line"] }) {
  const drawer = useDrawer();
  return <FieldForm key={`${line.id} ${JSON.stringify(line)}`} kind={line.kind} line={line} action="Take the changes" onTake={async (fields) => void (await drawer.editLines([line.id], fields))} />;
}

/** Every movement of a line, the newest first. */
function Ledger({ id }: { readonly id: string }) {
  const drawer = useDrawer();
  const [state, setState] = useState<{ readonly rows: readonly LedgerEntry[]; readonly hasMore: boolean; readonly problem: string | null } | null>(null);
  const read = useCallback((before: number | null) => drawer.host.call("drawer.ledger", { line: id, reference: null, before, limit: 50 }), [drawer, id]);
  useEffect(() => {
    let isCurrent = true;
    const readLatest = (): void => {
      read(null).then(
        ({ movements, hasMore }) => isCurrent && setState({ rows: movements, hasMore, problem: null }),
        (error: unknown) => isCurrent && setState({ rows: [], hasMore: false, problem: reasonOf(error) }),
      );
    };
    readLatest();
    const stop = drawer.host.on("drawer.changed", readLatest);
    return () => {
      isCurrent = false;
      stop();
    };
  }, [drawer, read]);
  if (state === null) return null;
  if (state.problem !== null) return <p className="field-error">{state.problem}</p>;
  if (state.rows.length === 0) return <p className="quiet">Nothing has been booked on this line yet.</p>;
  return (
    <>
      <table className="list-table">
        <TableHead columns={["when", "what", { figure: "pieces" }]} />
        <tbody>
          {state.rows.map((entry) => (
            <tr key={entry.id}>
              <td>{momentText(entry.at)}</td>
              <td>
                {entry.kind}
                {entry.reverses === null ? "" : ", taken back"}
                {(entry.reference !== "" || entry.note !== "") && <span className="list-note">{[entry.reference, entry.note].filter((text) => text !== "").join(" · ")}</span>}
              </td>
              <td className="is-number">{signed(entry.change)}</td>
            </tr>
          ))}
        </tbody>
      </table>
      {state.hasMore && (
        <button
          type="button"
          className="button is-small"
          onClick={() => void read(state.rows.at(-1)!.id).then(({ movements, hasMore }) => setState((old) => old && { rows: [...old.rows, ...movements], hasMore, problem: null }), (error: unknown) => setState((old) => old && { ...old, problem: reasonOf(error) }))}
        >
          Show earlier ones
        </button>
      )}
    </>
  );
}

function signed(change: number): string {
  return change > 0 ? `+${change}` : change < 0 ? `−${-change}` : "0";
}

function Changes({ history }: { readonly history: LineDetail["history"] }) {
  return (
    <ul className="change-list">
      {history.map((change) => (
        <li key={`${change.step} ${change.at}`}>
          <span>{change.label}</span>
          <span className="list-note">{momentText(change.at)}</span>
        </li>
      ))}
    </ul>
  );
}
