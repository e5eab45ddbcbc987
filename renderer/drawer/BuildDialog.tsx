import { useCallback, useMemo, useState } from "react";
import type { Build, DrawerLine } from "../../core/contract/drawer-schemas.ts";
import { buildBill, buildReference, unitsThere, type Bill } from "../../core/drawer/bill.ts";
import { boardProblems, listedProblems } from "../../core/drawer/board-problems.ts";
import type { Board } from "../../core/net/board.ts";
import { copyText } from "../editor/copy-text.ts";
import { download } from "../editor/actions/file-actions.ts";
import { suggestName } from "../editor/files.ts";
import { useShell } from "../editor/hooks.ts";
import { DialogFrame } from "../dialogs/DialogFrame.tsx";
import type { DialogProps } from "../dialogs/QuestionDialogs.tsx";
import type { HostClient } from "../host/client.ts";
import { BillTables } from "./BillTables.tsx";
import { readCount } from "./columns.ts";
import { reasonOf } from "./drawer-store.ts";
import { useDrawer } from "./hooks.ts";
import { counted } from "./line-text.ts";
import { shoppingCsv, shoppingText } from "./shopping.ts";
import { namedLines } from "./stock-query.ts";
import { moneysText } from "./swap-text.ts";
import { useBoardStock } from "./use-board-stock.ts";

interface Stock {
  readonly lines: readonly DrawerLine[];
  readonly builds: readonly Build[];
}

async function askStock(host: HostClient, board: Board): Promise<Stock> {
  const [lines, { builds }] = await Promise.all([namedLines(host, board), host.call("drawer.builds")]);
  return { lines, builds };
}

/** A number of units: what they take from the drawer, what is missing and what that costs; reserving and using book the ledger. */
export function BuildDialog({ close }: DialogProps<"drawerBuild">) {
  const { context } = useShell();
  const drawer = useDrawer();
  const { found, problem } = useBoardStock(askStock);
  const [text, setText] = useState<string | null>(null);
  const [trouble, setTrouble] = useState<string | null>(null);
  const [isBusy, setBusy] = useState(false);
  const reference = buildReference(context.editor.store.getState().project);
  const build = found?.stock.builds.find((one) => one.reference === reference) ?? null;
  const shownText = text ?? String(build && build.units > 0 ? build.units : 1);
  const count = readCount(shownText);
  const units = count.ok && count.count >= 1 && count.count <= 100_000 ? count.count : null;
  const bill = useMemo((): Bill | null => {
    if (!found || units === null) return null;
    return buildBill(found.board, found.stock.lines, units);
  }, [found, units]);
  const findings = useMemo(() => (found ? listedProblems(boardProblems(found.board, found.stock.lines)) : []), [found]);

  const book = useCallback(
    async (work: () => Promise<unknown>, done: string): Promise<void> => {
      setBusy(true);
      setTrouble(null);
      try {
        await work();
        context.ui.notify(done);
      } catch (error) {
        setTrouble(reasonOf(error));
      } finally {
        setBusy(false);
      }
    },
    [context],
  );

  const { host } = drawer;
  const name = context.editor.store.getState().project.name;
  const reserve = (): void => {
    if (bill) void book(() => host.call("drawer.reserve", { reference, units: bill.units, bill: [...bill.reserve] }), `Reserved the parts of ${counted(bill.units, "unit")}.`);
  };
  const use = (): void => {
    if (bill) void book(() => host.call("drawer.use", { reference, units: bill.units, bill: [...bill.reserve] }), `Booked the parts of ${counted(bill.units, "unit")} as used.`);
  };
  const release = (): void => void book(() => host.call("drawer.release", { reference }), `Released what was held for “${reference}”.`);
  const isBookable = bill !== null && bill.reserve.length > 0;
  const hasShopping = bill !== null && bill.shopping.length > 0;
  const shared = found?.stock.lines.length === 0;

  return (
    <DialogFrame
      title="Build units"
      size="is-broad"
      onDismiss={() => close(null)}
      foot={
        <>
          <button type="button" className="button" onClick={() => close(null)}>
            Close
          </button>
          {build !== null && build.units > 0 && (
            <button type="button" className="button" disabled={isBusy} onClick={release}>
              Release all
            </button>
          )}
          <button type="button" className="button" disabled={isBusy || !isBookable} onClick={use}>
            Use {units === null ? "" : counted(units, "unit")}
          </button>
          <button type="button" className="button is-primary" disabled={isBusy || !isBookable} onClick={reserve}>
            Reserve {units === null ? "" : counted(units, "unit")}
          </button>
        </>
      }
    >
      <div className="build-head">
        <label className="field-block">
          <span>Units of “{reference}”</span>
          <input className="text-input is-units" inputMode="numeric" value={shownText} aria-invalid={units === null} onFocus={(event) => event.currentTarget.select()} onChange={(event) => {
              setText(event.target.value);
              setTrouble(null);
            }} />
        </label>
        <p className="quiet" role="status">
          {stateText(build)}
        </p>
      </div>
      {units === null && <p className="field-error">A whole number of units, from 1 on.</p>}
      {(trouble ?? problem) !== null && (
        <p className="field-error is-kept" role="alert">
          {trouble ?? problem}
        </p>
      )}
      {shared && <p>No part of this board names a line of the drawer yet. Fill the board from the drawer first: then this list knows what to take.</p>}
      {bill && !shared && (
        <>
          <dl className="report-figures">
            <div>
              <dt>a unit costs</dt>
              <dd>{moneysText(bill.costPerUnit)}</dd>
            </div>
            <div>
              <dt>all cost</dt>
              <dd>{moneysText(bill.cost)}</dd>
            </div>
            <div>
              <dt>ready</dt>
              <dd data-testid="build-ready">{bill.isReady ? "every part is there" : readyText(bill)}</dd>
            </div>
          </dl>
          <BillTables bill={bill} findings={findings} />
          {hasShopping && (
            <div className="button-row">
              <button type="button" className="button is-small" onClick={() => void copyText(shoppingText(bill, name)).then(() => context.ui.notify("Copied the shopping list."), (error: unknown) => setTrouble(reasonOf(error)))}>
                Copy the shopping list
              </button>
              <button type="button" className="button is-small" onClick={() => download(`${suggestName(name)} shopping list.csv`, shoppingCsv(bill), "text/csv")}>
                Shopping list as CSV
              </button>
            </div>
          )}
        </>
      )}
    </DialogFrame>
  );
}

function stateText(build: Build | null): string {
  if (build === null) return "Nothing is reserved for it.";
  const used = build.unitsUsed > 0 ? `${counted(build.unitsUsed, "unit")} built. ` : "";
  return build.units > 0 ? `${used}The parts of ${counted(build.units, "unit")} are reserved.` : `${used}Nothing is reserved for it now.`;
}

function readyText(bill: Bill): string {
  const short = bill.rows.filter((row) => row.short > 0).length;
  const there = unitsThere(bill);
  return [short > 0 ? `${counted(short, "line")} too short${there > 0 ? `, pieces for ${counted(there, "unit")}` : ""}` : "", bill.unassigned.length > 0 ? `${counted(bill.unassigned.reduce((sum, row) => sum + row.perUnit, 0), "part")} without a line` : ""].filter((part) => part !== "").join(", ");
}
