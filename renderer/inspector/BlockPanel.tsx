import { memo, useState } from "react";
import { BAND_KINDS, BLOCKS } from "../../core/blocks/index.ts";
import type { BlockKind } from "../../core/blocks/kinds.ts";
import { blockName, setLabel, setOpAmp, setPart, setPartDatum, setPartValue, TRACK } from "../../core/model/edit.ts";
import { BUILT_IN_OP_AMPS, IDEAL, opAmpNames } from "../../core/model/op-amps.ts";
import type { Block, Part, Project } from "../../core/model/project.ts";
import { actionById, run } from "../editor/actions/actions.ts";
import { SwapSection } from "../drawer/SwapSection.tsx";
import { useEditorState, useShell } from "../editor/hooks.ts";
import { roleLabel } from "../editor/part-text.ts";
import { Choice, type Option } from "./Choice.tsx";
import { FiguresSection } from "./FiguresSection.tsx";
import { PartRows, type Datum, type PartEdits, type PartRole } from "./PartRows.tsx";
import { SliderSection } from "./SliderSection.tsx";

type OwnOpAmps = Project["opAmps"];

/** Op amps by name, each with a line about it. */
export function opAmpOptions(own: OwnOpAmps): Option[] {
  return opAmpNames(own ? { opAmps: own } : {}).map((name) => {
    const isOwn = own !== undefined && Object.hasOwn(own, name);
    const about = isOwn ? "this project's own model" : name === IDEAL ? "no limits: what the formulas say" : BUILT_IN_OP_AMPS[name]?.about;
    return { value: name, label: name, ...(about === undefined ? {} : { about }) };
  });
}

/** Whether an op amp's figures come from the built-in table, which is from memory. */
export function isFromTable(own: OwnOpAmps, name: string | undefined): boolean {
  return name !== undefined && name !== IDEAL && !(own && Object.hasOwn(own, name));
}

const KIND_OPTIONS: readonly Option[] = BAND_KINDS.map((kind) => ({ value: kind, label: BLOCKS[kind].label }));

/** Everything about one block, driven by its kind's definition alone. */
export function BlockPanel({ block }: { readonly block: Block }) {
  const figures = useEditorState((s) => s.analysis.results?.figures.get(block.id));
  return (
    <>
      <BlockHead id={block.id} kind={block.kind} label={block.label} />
      <PartsSection id={block.id} kind={block.kind} name={blockName(block)} parts={block.parts} track={block.slider?.track} opAmp={block.opAmp} />
      {figures && <FiguresSection figures={figures} />}
      <SwapSection block={block.id} />
      {block.slider && <SliderSection block={block} slider={block.slider} />}
    </>
  );
}

interface BlockHeadProps {
  readonly id: string;
  readonly kind: BlockKind;
  readonly label: string | undefined;
}

/** Takes no block but what it shows, so that a moving slider does not render it again. */
const BlockHead = memo(function BlockHead({ id, kind, label }: BlockHeadProps) {
  const { context } = useShell();
  const definition = BLOCKS[kind];
  return (
    <header className="panel-head">
      <h2 className="visually-hidden">{label ?? id}</h2>
      <LabelField id={id} label={label} />
      {definition.place === "band" ? (
        <div className="row">
          <span className="row-label">kind</span>
          <Choice label="Kind of band" value={kind} options={KIND_OPTIONS} onChoose={(next) => run(actionById(`change-to-${next}`), context)} />
        </div>
      ) : (
        <p className="quiet">{definition.label}</p>
      )}
    </header>
  );
});

interface PartsSectionProps {
  readonly id: string;
  readonly kind: BlockKind;
  readonly name: string;
  readonly parts: Block["parts"];
  readonly track: Part | undefined;
  readonly opAmp: string | undefined;
}

const PartsSection = memo(function PartsSection({ id, kind, name, parts, track, opAmp }: PartsSectionProps) {
  const { editor } = useShell().context;
  const own = useEditorState((s) => s.project.opAmps);
  const definition = BLOCKS[kind];
  const now = (): Project => editor.store.getState().project;
  const label = (role: string): string => roleLabel(kind, role);
  const edits: PartEdits = {
    onValue: (role, value) => editor.apply(`set ${label(role)} of “${name}”`, setPartValue(now(), id, role, value)),
    onDatum: (role, key, value) => editor.apply(`set ${DATUM_NAMES[key]} of ${label(role)}, “${name}”`, setPartDatum(now(), id, role, key, value)),
    onAdd: (role) => editor.apply(`add ${label(role)} to “${name}”`, setPartValue(now(), id, role, definition.roles.find((r) => r.role === role)!.value)),
    onRemove: (role) => editor.apply(`remove ${label(role)} from “${name}”`, setPart(now(), id, role, null)),
  };
  const roles: PartRole[] = definition.roles.map((r) => ({ role: r.role, label: r.label, quantity: r.quantity, isOptional: r.isOptional, part: parts?.[r.role] }));
  if (track) roles.push({ role: TRACK, label: label(TRACK), quantity: "resistance", isOptional: false, part: track });
  return (
    <section className="panel-section" aria-label="Parts">
      {roles.length > 0 && <PartRows roles={roles} edits={edits} />}
      {definition.hasOpAmp && (
        <>
          <div className="row">
            <span className="row-label">op amp</span>
            <Choice label="Op amp" value={opAmp ?? ""} options={opAmpOptions(own)} onChoose={(next) => editor.apply(`set op amp of “${name}”`, setOpAmp(now(), id, next))} />
          </div>
          {opAmp !== undefined && isFromTable(own, opAmp) && <p className="hint">{BUILT_IN_OP_AMPS[opAmp]?.about}. Typical values from memory: check the maker's current sheet.</p>}
        </>
      )}
    </section>
  );
});

const DATUM_NAMES: Readonly<Record<Datum, string>> = { tolerance: "tolerance", measured: "measured value", windingR: "winding R", selfC: "self C" };

/** The block's name; its id while it has no label. */
function LabelField({ id, label }: { readonly id: string; readonly label: string | undefined }) {
  const { editor } = useShell().context;
  const [draft, setDraft] = useState<string | null>(null);
  const take = (): void => {
    if (draft !== null) editor.apply(`rename “${label ?? id}”`, setLabel(editor.store.getState().project, id, draft));
    setDraft(null);
  };
  return (
    <div>
      <input
        className="title-input"
        aria-label="Label"
        value={draft ?? label ?? ""}
        placeholder={id}
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
      <p className="hint">{id}</p>
    </div>
  );
}
