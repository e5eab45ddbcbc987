import type { ImportReport } from "../../core/contract/drawer-schemas.ts";
import type { EventData } from "../../core/contract/methods.ts";
import { counted } from "./line-text.ts";
import { TableHead } from "./TableHead.tsx";

export type Progress = EventData<"drawer.importProgress">;

/** How far an import is. */
export function ImportProgress({ progress }: { readonly progress: Progress | null }) {
  const share = progress === null || progress.total === null || progress.total === 0 ? null : Math.min(1, progress.done / progress.total);
  const text = progress === null ? "Beginning…" : progress.phase === "reading" ? "Reading the table…" : `Taking lines in: ${progress.done}${progress.total === null ? "" : ` of ${progress.total}`}`;
  return (
    <div className="import-progress">
      <progress aria-label="Progress of the import" max={1} {...(share === null ? {} : { value: share })} />
      <p role="status">{text}</p>
      <p className="hint">Until it is done nothing of it is kept, so that it can be stopped.</p>
    </div>
  );
}

/** Rows that cannot be taken, by their line in the file. */
export function FaultTable({ faults, refused }: { readonly faults: readonly { readonly row: number; readonly message: string }[]; readonly refused: number }) {
  return (
    <div className="fault-table">
      <table className="list-table">
        <caption>{counted(refused, "line")} refused</caption>
        <TableHead columns={[{ figure: "line" }, "why"]} />
        <tbody>
          {faults.slice(0, 200).map((fault) => (
            <tr key={`${fault.row} ${fault.message}`}>
              <td className="is-number">{fault.row}</td>
              <td>{fault.message}</td>
            </tr>
          ))}
        </tbody>
      </table>
      {refused > Math.min(200, faults.length) && <p className="hint">… and {refused - Math.min(200, faults.length)} more.</p>}
    </div>
  );
}

/** What an import did. */
export function ReportView({ report, name }: { readonly report: ImportReport; readonly name: string }) {
  const rows = [
    ["rows read", report.rows],
    ["new lines", report.added],
    ["updated", report.updated],
    ["as they were", report.unchanged],
    ["quantities booked as counted", report.counted],
    ["refused", report.refused],
  ] as const;
  return (
    <>
      <p>
        {name} is in the drawer, as one step: <kbd>Ctrl+Z</kbd> in the drawer takes all of it back.
      </p>
      <dl className="report-figures is-rows">
        {rows.map(([label, count]) => (
          <div key={label}>
            <dt>{label}</dt>
            <dd>{count}</dd>
          </div>
        ))}
      </dl>
      {report.refused > 0 && <FaultTable faults={report.faults} refused={report.refused} />}
    </>
  );
}
