import { useState } from "react";
import { BAND_KINDS, BLOCKS } from "../../core/blocks/index.ts";
import { blockName, setLabel, setOpAmp, setPart, setPartValue } from "../../core/model/edit.ts";
import { BUILT_IN_OP_AMPS, IDEAL, opAmpNames } from "../../core/model/op-amps.ts";
import { partsOf, type Block, type Project } from "../../core/model/project.ts";
import { actionById, run } from "../editor/actions/actions.ts";
import { useEditorState, useShell } from "../editor/hooks.ts";
import { editPartDatum, roleLabel } from "../editor/part-text.ts";
import { Choice, type Option } from "./Choice.tsx";
import { FiguresSection } from "./FiguresSection.tsx";
import { PartRows, trackRole, type PartEdits, type PartRole } from "./PartRows.tsx";
import { SliderSection } from "./SliderSection.tsx";

/** Op amps by name, each with a line about it. */
export function opAmpOptions(project: Pick<Project, "opAmps">): Option[] {
  return opAmpNames(project).map((name) => {
    const isOwn = project.opAmps !== undefined && Object.hasOwn(project.opAmps, name);
    const about = isOwn ? "this project's own model" : name === IDEAL ? "no limits: what the formulas say" : BUILT_IN_OP_AMPS[name]?.about;
    return { value: name, label: name, ...(about === undefined ? {} : { about }) };
  });
}

/** Whether an op amp's figures come from the built-in table, which is from memory. */
export function isFromTable(project: Pick<Project, "opAmps">, name: string | undefined): boolean {
  return name !== undefined && name !== IDEAL && !(project.opAmps && Object.hasOwn(project.opAmps, name));
}

const KIND_OPTIONS: readonly Option[] = BAND_KINDS.map((kind) => ({ value: kind, label: BLOCKS[kind].label }));

/** Everything about one block, driven by its kind's definition alone. */
export function BlockPanel({ block }: { readonly block: Block }) {
  const { context } = useShell();
  const { editor } = context;
  const project = useEditorState((s) => s.project);
  const figures = useEditorState((s) => s.analysis.results?.figures.get(block.id));
  const definition = BLOCKS[block.kind];
  const now = (): Project => editor.store.getState().project;
  const name = blockName(block);
  const edits: PartEdits = {
    onValue: (role, value) => editor.apply(`set ${roleLabel(block, role)} of “${name}”`, setPartValue(now(), block.id, role, value)),
    onDatum: (role, key, value) => editPartDatum(editor, block, role, key, value),
    onAdd: (role) => editor.apply(`add ${roleLabel(block, role)} to “${name}”`, setPartValue(now(), block.id, role, definition.roles.find((r) => r.role === role)!.value)),
    onRemove: (role) => editor.apply(`remove ${roleLabel(block, role)} from “${name}”`, setPart(now(), block.id, role, null)),
  };
  const roles: PartRole[] = [...definition.roles.map((r) => ({ role: r.role, label: r.label, quantity: r.quantity, isOptional: r.isOptional, part: partsOf(block)[r.role] })), ...trackRole(block)];
  return (
    <>
      <header className="panel-head">
        <h2 className="visually-hidden">{name}</h2>
        <LabelField block={block} />
        {definition.place === "band" ? (
          <div className="row">
            <span className="row-label">kind</span>
            <Choice label="Kind of band" value={block.kind} options={KIND_OPTIONS} onChoose={(kind) => run(actionById(`change-to-${kind}`), context)} />
          </div>
        ) : (
          <p className="quiet">{definition.label}</p>
        )}
      </header>
      <section className="panel-section" aria-label="Parts">
        {roles.length > 0 && <PartRows roles={roles} edits={edits} />}
        {definition.hasOpAmp && (
          <>
            <div className="row">
              <span className="row-label">op amp</span>
              <Choice label="Op amp" value={block.opAmp ?? ""} options={opAmpOptions(project)} onChoose={(opAmp) => editor.apply(`set op amp of “${name}”`, setOpAmp(now(), block.id, opAmp))} />
            </div>
            {isFromTable(project, block.opAmp) && <p className="hint">{BUILT_IN_OP_AMPS[block.opAmp!]?.about}. Typical values from memory: check the maker's current sheet.</p>}
          </>
        )}
      </section>
      {figures && <FiguresSection figures={figures} />}
      {block.slider && <SliderSection block={block} slider={block.slider} />}
    </>
  );
}

/** The block's name; its id while it has no label. */
function LabelField({ block }: { readonly block: Block }) {
  const { editor } = useShell().context;
  const [draft, setDraft] = useState<string | null>(null);
  const take = (): void => {
    if (draft !== null) editor.apply(`rename “${blockName(block)}”`, setLabel(editor.store.getState().project, block.id, draft));
    setDraft(null);
  };
  return (
    <div>
      <input
        className="title-input"
        aria-label="Label"
        value={draft ?? block.label ?? ""}
        placeholder={block.id}
        data-untouched={draft === null}
        onChange={(event) => setDraft(event.target.value)}
        onBlur={take}
        onKeyDown={(event) => {
          if (event.key === "Enter") take();
          if (event.key === "Escape" && draft !== null) {
            setDraft(null);
            event.preventDefault();
          }
        }}
      />
      <p className="hint">{block.id}</p>
    </div>
  );
}
