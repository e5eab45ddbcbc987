import { useMemo } from "react";
import { blockIds, boardReport } from "../../core/analysis/equation-report.ts";
import { blockName } from "../../core/model/edit.ts";
import { useEditorState, useShell } from "../editor/hooks.ts";
import { WiringFaults } from "../panels/WiringFaults.tsx";
import "./equations.css";

/** The equations behind the selected block. */
export function EquationsArea() {
  const { editor } = useShell().context;
  const { board, faults } = useEditorState((s) => s.analysis);
  const selection = useEditorState((s) => s.selection);
  const ids = useMemo(() => (board ? blockIds(board) : []), [board]);
  const chosen = ids.find((id) => selection.includes(id)) ?? ids[0];
  const report = useMemo(() => (board && chosen !== undefined ? boardReport(board, { style: "text", blocks: [chosen] }).blocks[0] : null), [board, chosen]);
  const names = new Map(board?.project.blocks.map((block) => [block.id, blockName(block)]));
  return (
    <main className="equations" aria-label="Equations" tabIndex={-1}>
      {faults.length > 0 && <WiringFaults faults={faults} />}
      <nav className="equations-list" aria-label="Blocks">
        {ids.map((id) => (
          <button key={id} type="button" className="equations-entry" aria-current={id === chosen} onClick={() => editor.select([id])}>
            {names.get(id) ?? id}
          </button>
        ))}
      </nav>
      {report && (
        <article className="equations-page">
          <h2>{report.label}</h2>
          {report.sections.map((section) => (
            <section key={section.title}>
              <h3>{section.title}</h3>
              <pre>{section.lines.map((line) => line.text).join("\n")}</pre>
            </section>
          ))}
        </article>
      )}
    </main>
  );
}
