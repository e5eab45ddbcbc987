import type { Fault } from "../../core/errors.ts";
import { useShell } from "../editor/hooks.ts";

/** Stands where the response would be, and leads to the blocks that are wired wrongly. */
export function WiringFaults({ faults }: { readonly faults: readonly Fault[] }) {
  return (
    <section className="sheet-card is-faults" aria-label="Wiring faults" role="alert">
      <h2>
        {faults.length === 1 ? "One wiring fault" : `${faults.length} wiring faults`}: there is no response to show
      </h2>
      <p className="quiet">The board is open and can be edited. Each entry selects the blocks that it speaks of.</p>
      <FaultList faults={faults} />
    </section>
  );
}

/** Faults or warnings; one that names blocks selects them. */
export function FaultList({ faults }: { readonly faults: readonly Fault[] }) {
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
        </li>
      ))}
    </ul>
  );
}
