import { useEffect, useState } from "react";
import { actionById, run } from "../editor/actions/actions.ts";
import { useShell } from "../editor/hooks.ts";
import "./drawer.css";
import "./panels.css";
import "./work.css";
import { reasonOf } from "./drawer-store.ts";
import { FilterBar } from "./FilterBar.tsx";
import { useDrawer, useDrawerState } from "./hooks.ts";
import { LineTable } from "./LineTable.tsx";
import { ValueAxis } from "./ValueAxis.tsx";

/** The parts library: a value axis of what one owns, a filter, and the table of lines. */
export function DrawerView() {
  const drawer = useDrawer();
  const info = useDrawerState((s) => s.info);
  const unusable = useDrawerState((s) => s.unusable);
  const isNothing = useDrawerState((s) => s.total === 0 && !s.isLooking);
  useEffect(() => drawer.open(), [drawer]);
  return (
    <main className="drawer-view" aria-label="Drawer" tabIndex={-1}>
      {unusable !== null ? (
        <Unusable message={unusable.message} reason={unusable.data?.reason ?? null} backup={unusable.data?.backup ?? null} />
      ) : info === null ? (
        <p className="drawer-opening" role="status">
          Opening the drawer…
        </p>
      ) : info.lines + info.retired === 0 ? (
        <EmptyDrawer path={info.path} />
      ) : (
        <>
          <ValueAxis />
          <FilterBar />
          <LineTable />
          {isNothing && <p className="drawer-none">No line fits this filter. Take a word or a choice away, or show all.</p>}
        </>
      )}
    </main>
  );
}

function EmptyDrawer({ path }: { readonly path: string }) {
  const { context } = useShell();
  const drawer = useDrawer();
  const [problem, setProblem] = useState<string | null>(null);
  const [isBusy, setBusy] = useState(false);
  const fill = async (): Promise<void> => {
    setBusy(true);
    setProblem(null);
    try {
      await drawer.starter();
    } catch (error) {
      setProblem(reasonOf(error));
    } finally {
      setBusy(false);
    }
  };
  return (
    <section className="drawer-card" aria-label="An empty drawer">
      <h2>Nothing in the drawer yet</h2>
      <p>The drawer knows the parts that you own: values, tolerances, ratings, how many there are and where. Boards are filled from it, and every piece is booked.</p>
      <div className="button-row">
        <button type="button" className="button is-primary" disabled={isBusy} onClick={() => void fill()}>
          {isBusy ? "Filling…" : "Look around with the starter drawer"}
        </button>
        <button type="button" className="button" onClick={() => run(actionById("drawer-import"), context)}>
          Import a table…
        </button>
        <button type="button" className="button" onClick={() => run(actionById("drawer-add-line"), context)}>
          Add the first line…
        </button>
      </div>
      {problem !== null && (
        <p className="field-error" role="alert">
          {problem}
        </p>
      )}
      <p className="hint path">It is kept in {path}. The starter drawer is an invented small workshop; undo takes it out again.</p>
    </section>
  );
}

const ADVICE: Readonly<Record<string, string>> = {
  damaged: "Put a sound copy of your own in its place (the folder's backups, or your last export as CSV), then try again.",
  "not-a-drawer": "Move that file somewhere else, then try again: a new drawer is made in its place.",
  newer: "Start the newer Bandwright to use it. Nothing in it was changed.",
  busy: "Close the other program, or wait until it has finished.",
  permission: "Give yourself the right to read and write that file, then try again.",
  full: "Make room on the disk, then try again.",
};

function Unusable({ message, reason, backup }: { readonly message: string; readonly reason: string | null; readonly backup: string | null }) {
  const drawer = useDrawer();
  return (
    <section className="drawer-card is-faulty" aria-label="The drawer cannot be used" role="alert">
      <h2>{reason === "newer" ? "This drawer is newer than the program" : "The drawer cannot be used"}</h2>
      <p className="path">{message}</p>
      {backup !== null && (
        <p className="path">
          The copy: <strong>{backup}</strong>
        </p>
      )}
      <p className="hint">{(reason === null ? undefined : ADVICE[reason]) ?? "The board and everything else work without it."}</p>
      <div className="button-row">
        <button type="button" className="button is-primary" onClick={() => drawer.open()}>
          Try again
        </button>
      </div>
    </section>
  );
}
