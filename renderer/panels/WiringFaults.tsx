import type { Fault } from "../../core/errors.ts";
import { removeWire } from "../../core/model/edit.ts";
import { useShell } from "../editor/hooks.ts";

/** Stands where the response would be, and leads to the blocks that are wired wrongly. */
export function WiringFaults({ faults }: { readonly faults: readonly Fault[] }) {
  return (
    <section className="sheet-card is-faults" aria-label="Wiring faults" role="alert">
      <h2>
        {faults.length === 1 ? "One wiring fault" : `${faults.length} wiring faults`}: there is no response to show
      </h2>
      <p className="quiet">The board is open and can be edited. Each entry selects the blocks that it speaks of; a wire that is wrong can be taken out.</p>
      <FaultList faults={faults} canMend />
    </section>
  );
}

/** Faults or warnings; one that names blocks selects them, and one that speaks of a wire can take it out. */
export function FaultList({ faults, canMend = false }: { readonly faults: readonly Fault[]; readonly canMend?: boolean }) {
  const { context, sheetRef } = useShell();
  return (
    <ul className="fault-list">
      {faults.map((fault, index) => (
        // Two faults may say the same of different wires; their order is all that tells them apart.
        // oxlint-disable-next-line react/no-array-index-key
        <li key={index}>
          <button
            type="button"
            className="fault-button"
            onClick={() => {
              const here = new Set(context.editor.store.getState().project.blocks.map((b) => b.id));
              const ids = (fault.blocks ?? []).filter((id) => here.has(id));
              context.editor.select(ids);
              if (ids[0] !== undefined) sheetRef.current?.focusBlock(ids[0]);
            }}
          >
            <span>{fault.message}</span>
            {fault.path !== "" && <span className="fault-path">{fault.path}</span>}
          </button>
          {canMend && wireOf(fault) !== null && (
            <button type="button" className="button" onClick={() => context.editor.apply("take out a wire", removeWire(context.editor.store.getState().project, wireOf(fault)!))}>
              Take this wire out
            </button>
          )}
        </li>
      ))}
    </ul>
  );
}

/** The wire that a fault is about, by its place in the file; null where it is about none. */
function wireOf(fault: Fault): number | null {
  const match = /^wires\[(\d+)\]/.exec(fault.path);
  return match ? Number(match[1]) : null;
}
