import { Popover } from "@base-ui/react/popover";
import { useMemo } from "react";
import { impracticalParts } from "../../core/blocks/practical.ts";
import type { Fault } from "../../core/errors.ts";
import { readCurve } from "../../core/geometry/reading.ts";
import { blockName, partOf } from "../../core/model/edit.ts";
import type { Project } from "../../core/model/project.ts";
import { formatDb, formatFigure } from "../../core/units.ts";
import { chordText } from "../editor/actions/chords.ts";
import { useDrawer, useDrawerState } from "../drawer/hooks.ts";
import { useEditorState, useShell, useUiState } from "../editor/hooks.ts";
import { quantityOf, roleLabel, valueCaution } from "../editor/part-text.ts";
import { degreesText } from "../sheet/figure-texts.ts";
import { StabilityStatus } from "./Stability.tsx";
import { FaultList } from "./WiringFaults.tsx";

/** One line: what the pointer is on, what just happened, how flat the board is, what to look at. */
export function StatusLine() {
  const isSingle = useEditorState((s) => s.project.supply.kind === "single");
  const flatness = useEditorState((s) => s.analysis.flatness);
  const notice = useUiState((s) => s.notice);
  const view = useUiState((s) => s.view);
  return (
    <footer className="status-line">
      {view === "drawer" ? <DrawerReading /> : view === "board" ? <CursorReading /> : <span className="status-reading" />}
      {/* The paragraph stays, for screen readers tell what changes in one, not that one came; what it says is new each time, the same words too. */}
      <p className={notice?.isWarning ? "status-notice is-warning" : "status-notice"} role="status">
        <span key={notice?.key}>{notice?.text}</span>
      </p>
      {isSingle && <span className="status-caution">single supply: mind the polarity of coupling capacitors</span>}
      {flatness !== null && (
        <span className="is-circuit-figure" data-testid="flatness" title="20 Hz to 20 kHz, against 1 kHz">
          flat within {formatFlatness(flatness)} with sliders centred
        </span>
      )}
      <StabilityStatus />
      <Warnings />
    </footer>
  );
}

function formatFlatness(flatness: number): string {
  return flatness < 0.005 ? "0.01 dB" : `${Number(flatness.toPrecision(2))} dB`;
}

/** The response where the pointer is: read anew whenever the pointer or the board changes. */
function CursorReading() {
  const frequency = useUiState((s) => s.cursor);
  const total = useEditorState((s) => s.analysis.results?.total);
  const reading = frequency !== null && total ? readCurve(total, frequency) : null;
  return (
    <span className={reading ? "status-reading is-circuit-figure" : "status-reading"} data-testid="cursor-reading">
      {frequency !== null && reading ? `${formatFigure(frequency, "frequency")} · ${formatDb(reading.gain, 2)} · ${degreesText(reading.phase)}` : <span className="quiet">Point at the sheet to read it</span>}
    </span>
  );
}

/** In the drawer Undo is the drawer's own: what it would take back stands here. */
function DrawerReading() {
  const { context } = useShell();
  const drawer = useDrawer();
  useDrawerState((s) => s.steps);
  const label = drawer.undoLabel();
  return <span className="status-reading quiet">{label === null ? "Nothing to undo in the drawer" : `${chordText("Mod+Z", context.isMac)} in the drawer takes back: ${label}`}</span>;
}

/** Parts whose values no part has, as warnings that lead to them. */
function valueFaults(project: Project): Fault[] {
  return impracticalParts(project).map(({ id, role }) => {
    const block = project.blocks.find((b) => b.id === id)!;
    return { path: "", message: `${roleLabel(block.kind, role)} of “${blockName(block)}”: ${valueCaution(partOf(block, role)!.value, role, quantityOf(block, role)!)}`, blocks: [id] };
  });
}

function Warnings() {
  const wiring = useEditorState((s) => s.analysis.warnings);
  const file = useEditorState((s) => s.fileWarnings);
  const project = useEditorState((s) => s.project);
  const values = useMemo(() => valueFaults(project), [project]);
  const warnings = [...wiring, ...file, ...values];
  if (warnings.length === 0) return null;
  return (
    <Popover.Root>
      <Popover.Trigger className="status-button is-warning">{warnings.length === 1 ? "⚠ 1 warning" : `⚠ ${warnings.length} warnings`}</Popover.Trigger>
      <Popover.Portal>
        <Popover.Positioner className="positioner" side="top" align="end" sideOffset={6}>
          <Popover.Popup className="popup popover-body">
            <Popover.Title render={<h3 />}>Warnings</Popover.Title>
            <FaultList faults={warnings} />
          </Popover.Popup>
        </Popover.Positioner>
      </Popover.Portal>
    </Popover.Root>
  );
}
