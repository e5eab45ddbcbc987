import { useEffect, useRef, useState } from "react";
import type { ImportReport } from "../../core/contract/drawer-schemas.ts";
import { isHostFailure } from "../../core/contract/failures.ts";
import type { ResultOf } from "../../core/contract/methods.ts";
import type { ImportMapping, TableReading } from "../../core/drawer/mapping.ts";
import { DialogFrame } from "../dialogs/DialogFrame.tsx";
import type { DialogProps } from "../dialogs/QuestionDialogs.tsx";
import { useShell } from "../editor/hooks.ts";
import { reasonOf } from "./drawer-store.ts";
import { useDrawer } from "./hooks.ts";
import { ImportMappingTable } from "./ImportMappingTable.tsx";
import { FaultTable, ImportProgress, ReportView, type Progress } from "./ImportReportView.tsx";
import { counted } from "./line-text.ts";
import { decodeText } from "./decode-text.ts";

type Preview = ResultOf<"drawer.importPreview">;

/** As much as one call carries, as it travels. */
const MOST_BYTES = 16 * 1024 * 1024;

interface Chosen {
  readonly name: string;
  readonly bytes: ArrayBuffer;
  readonly text: string;
}

type Refusal = { readonly rows: number; readonly refused: number; readonly faults: readonly { readonly row: number; readonly message: string }[] };

let nextJob = 1;

/** Takes a table in: which file, what its columns mean, how its first rows would be taken, and what came of it. */
export function ImportDialog({ close }: DialogProps<"drawerImport">) {
  const { context } = useShell();
  const drawer = useDrawer();
  const [file, setFile] = useState<Chosen | null>(null);
  const [preview, setPreview] = useState<Preview | null>(null);
  const [check, setCheck] = useState<ImportReport | null>(null);
  const [skip, setSkip] = useState(false);
  const [job, setJob] = useState<string | null>(null);
  const [progress, setProgress] = useState<Progress | null>(null);
  const [refusal, setRefusal] = useState<Refusal | null>(null);
  const [report, setReport] = useState<ImportReport | null>(null);
  const [problem, setProblem] = useState<string | null>(null);
  const picker = useRef<HTMLInputElement>(null);
  const turn = useRef(0);
  /** The trial that is under way; a later one, or the dialog's end, stops it. */
  const trial = useRef<string | null>(null);
  const [trialProgress, setTrialProgress] = useState<Progress | null>(null);
  const { host } = drawer;

  useEffect(
    () =>
      host.on("drawer.importProgress", (now) => {
        if (now.job === job) setProgress(now);
        if (now.job === trial.current) setTrialProgress(now);
      }),
    [host, job],
  );
  useEffect(
    () => () => {
      if (trial.current !== null) void host.call("drawer.cancelImport", { job: trial.current }).catch(() => undefined);
    },
    [host],
  );

  /** Looks at the table again, and tries the whole of it without keeping anything. */
  const look = async (chosen: Chosen, reading: TableReading | null, mapping: ImportMapping | null): Promise<void> => {
    const mine = ++turn.current;
    setProblem(null);
    setRefusal(null);
    setCheck(null);
    setTrialProgress(null);
    const earlier = trial.current;
    trial.current = `trial-${nextJob++}`;
    try {
      if (earlier !== null) await host.call("drawer.cancelImport", { job: earlier });
      const next = await host.call("drawer.importPreview", { source: { text: chosen.text }, reading, mapping });
      if (mine !== turn.current) return;
      setPreview(next);
      const tried = await host.call("drawer.import", { job: trial.current, source: { text: chosen.text }, reading: next.reading, mapping: next.mapping, skipBadRows: true, dryRun: true });
      if (mine === turn.current) setCheck(tried);
    } catch (error) {
      if (mine === turn.current) setProblem(reasonOf(error));
    } finally {
      if (mine === turn.current) trial.current = null;
    }
  };

  const pick = async (picked: File | undefined): Promise<void> => {
    if (!picked) return;
    setReport(null);
    setPreview(null);
    try {
      const bytes = picked.size > MOST_BYTES ? new ArrayBuffer(0) : await picked.arrayBuffer();
      const { text, encoding } = decodeText(bytes, null);
      if (picked.size > MOST_BYTES || new Blob([JSON.stringify(text)]).size > MOST_BYTES) {
        setProblem(`${picked.name} is too large to be taken in at once (${Math.round(picked.size / 1e6)} MB). Divide it, or import it on the command line.`);
        return;
      }
      const chosen = { name: picked.name, bytes, text };
      setFile(chosen);
      await look(chosen, null, null);
      if (encoding !== "utf-8") setPreview((old) => old && { ...old, reading: { ...old.reading, encoding } });
    } catch (error) {
      setProblem(reasonOf(error));
    }
  };

  const changeReading = (reading: TableReading): void => {
    if (!file || !preview) return;
    const again = reading.encoding === preview.reading.encoding ? file : { ...file, text: decodeText(file.bytes, reading.encoding).text };
    setFile(again);
    // Another delimiter or header makes other columns: they are guessed anew.
    void look(again, reading, null);
  };

  const run = async (): Promise<void> => {
    if (!file || !preview) return;
    const name = `import-${nextJob++}`;
    setJob(name);
    setProgress(null);
    setProblem(null);
    setRefusal(null);
    try {
      const done = await host.call("drawer.import", { job: name, source: { text: file.text }, reading: preview.reading, mapping: preview.mapping, skipBadRows: skip, dryRun: false });
      setReport(done);
      context.ui.notify(`Imported ${counted(done.added + done.updated, "line")} from ${file.name}.`);
    } catch (error) {
      if (isHostFailure(error, "import-refused")) setRefusal(error.data);
      else setProblem(reasonOf(error));
    } finally {
      setJob(null);
    }
  };

  const isRunning = job !== null;
  const bad = check?.refused ?? 0;
  return (
    <DialogFrame
      title={report ? "Imported" : "Import a table"}
      size="is-broad"
      onDismiss={() => !isRunning && close(null)}
      foot={
        report ? (
          <button type="button" className="button is-primary" onClick={() => close(null)}>
            Close
          </button>
        ) : (
          <>
            {file !== null && !isRunning && (
              <button type="button" className="button" onClick={() => picker.current?.click()}>
                Another file…
              </button>
            )}
            <button type="button" className="button" onClick={() => (isRunning ? void host.call("drawer.cancelImport", { job }) : close(null))}>
              {isRunning ? "Stop" : "Cancel"}
            </button>
            {file !== null && (
              <button type="button" className="button is-primary" disabled={isRunning || preview === null || check === null || check.rows === bad || (bad > 0 && !skip)} onClick={() => void run()}>
                Import {check ? counted(check.rows - bad, "row") : ""}
              </button>
            )}
          </>
        )
      }
    >
      <input ref={picker} type="file" className="visually-hidden" aria-label="Table file" tabIndex={-1} accept=".csv,.tsv,.txt,text/csv,text/tab-separated-values,text/plain" onChange={(event) => void pick(event.target.files?.[0])} />
      {report ? (
        <ReportView report={report} name={file?.name ?? ""} />
      ) : (
        <>
          {file === null && (
            <div className="import-pick">
              <p>A table as a spreadsheet exports it: commas, semicolons or tabs, decimal points or commas, values in trade notation. Lines with a known id are updated, others are new.</p>
              <button type="button" className="button is-primary" onClick={() => picker.current?.click()}>
                Choose a file…
              </button>
            </div>
          )}
          {isRunning && <ImportProgress progress={progress} />}
          {file !== null && preview !== null && !isRunning && (
            <>
              <ImportMappingTable preview={preview} name={file.name} onReading={changeReading} onMapping={(mapping) => void look(file, preview.reading, mapping)} />
              <p className="import-verdict" role="status">
                {check === null ? `Trying every row${trialProgress?.phase === "writing" ? `: ${trialProgress.done} of ${trialProgress.total}` : ""}…` : `${counted(check.rows, "row")}: ${check.added} new, ${check.updated} updated, ${check.unchanged} as they are, ${bad} refused.`}
              </p>
              {check !== null && bad > 0 && (
                <>
                  <FaultTable faults={check.faults} refused={bad} />
                  <label className="check">
                    <input type="checkbox" checked={skip} onChange={(event) => setSkip(event.target.checked)} />
                    skip bad lines and take the others
                  </label>
                </>
              )}
            </>
          )}
          {refusal && <FaultTable faults={refusal.faults} refused={refusal.refused} />}
          {problem !== null && (
            <p className="field-error is-kept" role="alert">
              {problem}
            </p>
          )}
        </>
      )}
    </DialogFrame>
  );
}
