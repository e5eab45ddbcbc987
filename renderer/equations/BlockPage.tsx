import { useMemo } from "react";
import { BLOCKS } from "../../core/blocks/index.ts";
import type { Board } from "../../core/net/board.ts";
import { editText, formatValue, parseValue } from "../../core/units.ts";
import { actionById, run } from "../editor/actions/actions.ts";
import { useEditorState, useShell, useUiState } from "../editor/hooks.ts";
import type { Taken } from "../editor/part-text.ts";
import { ValueField } from "../inspector/ValueField.tsx";
import { nameOfBlock } from "../panels/Stability.tsx";
import { AccountSection } from "./AccountSection.tsx";
import { lawModels, nodesModel, placeIn, transferModel, type NodesModel } from "./block-model.ts";
import { LawsSection } from "./LawsSection.tsx";
import { NodesSection } from "./NodesSection.tsx";
import { shownFrequency } from "./shown.ts";
import { TransferSection } from "./TransferSection.tsx";

interface BlockPageProps {
  readonly board: Board;
  readonly id: string;
}

/** Everything that is computed of one block, from its laws on paper to the currents in its nodes. */
export function BlockPage({ board, id }: BlockPageProps) {
  const figures = useEditorState((s) => s.analysis.results?.figures);
  const asked = useUiState((s) => s.equationsAt);
  const place = useMemo(() => placeIn(board, id), [board, id]);
  const suggested = shownFrequency(id, figures);
  const frequency = asked ?? suggested;
  const laws = useMemo(() => (place ? lawModels(place) : []), [place]);
  const transfer = useMemo(() => (place ? transferModel(board, place, frequency) : null), [board, place, frequency]);
  const nodes = useMemo(() => solvedNodes(board, id, frequency), [board, id, frequency]);
  const kind = place ? BLOCKS[place.block.kind] : null;
  const name = place ? nameOfBlock(board.project, id) : "Signal reference";
  const figure = figures?.get(id);
  return (
    <article className="equations-article" aria-label={`Equations of ${name}`} data-equations-of={id}>
      <header className="equations-head">
        <div>
          <h2>{name}</h2>
          <p className="quiet">{kind ? `${kind.label} · ${id}` : "divider of the single supply, which every reference point shares"}</p>
        </div>
        <CopyButtons />
      </header>
      {laws.length > 0 && <LawsSection laws={laws} />}
      {figure && <AccountSection figure={figure} />}
      <FrequencyLine frequency={frequency} suggested={suggested} isBand={figure !== undefined} name={name} />
      {transfer && <TransferSection model={transfer} frequency={frequency} />}
      {nodes.ok ? (
        <NodesSection model={nodes.model} frequency={frequency} />
      ) : (
        <p className="caution" role="alert">
          {nodes.message}
        </p>
      )}
    </article>
  );
}

type SolvedNodes = { readonly ok: true; readonly model: NodesModel } | { readonly ok: false; readonly message: string };

function solvedNodes(board: Board, id: string, frequency: number): SolvedNodes {
  try {
    return { ok: true, model: nodesModel(board, id, frequency) };
  } catch (error) {
    if (!(error instanceof RangeError)) throw error;
    return { ok: false, message: `There are no numbers to show at this frequency: ${error.message}.` };
  }
}

const COPIES = [
  ["This block", "block"],
  ["Whole board", "board"],
] as const;

function CopyButtons() {
  const { context } = useShell();
  return (
    <div className="copy-buttons">
      {COPIES.map(([label, scope]) => (
        <div key={scope} className="copy-row" role="group" aria-label={`${label}: copy its equations`}>
          <span className="quiet">{label}</span>
          <button type="button" className="button is-small" onClick={() => run(actionById(`copy-${scope}-equations-text`), context)}>
            Copy as text
          </button>
          <button type="button" className="button is-small" onClick={() => run(actionById(`copy-${scope}-equations-tex`), context)}>
            Copy as LaTeX
          </button>
        </div>
      ))}
    </div>
  );
}

const LOWEST = 1e-3;
const HIGHEST = 1e9;

function readFrequency(text: string): Taken {
  const read = parseValue(text, "frequency");
  if (!read.ok) return read;
  return read.value >= LOWEST && read.value <= HIGHEST ? read : { ok: false, message: "must be from 1 mHz to 1 GHz" };
}

interface FrequencyLineProps {
  readonly frequency: number;
  readonly suggested: number;
  readonly isBand: boolean;
  readonly name: string;
}

/** Where numbers are put in: typed, the block's own place, or the cursor of the sheet (the E key there). */
function FrequencyLine({ frequency, suggested, isBand, name }: FrequencyLineProps) {
  const { ui } = useShell().context;
  const isAsked = useUiState((s) => s.equationsAt !== null);
  return (
    <section className="frequency-line" aria-label="Frequency">
      <h3>Numbers at</h3>
      <ValueField
        label="Frequency of the numbers"
        value={frequency}
        format={(value) => formatValue(value, "frequency", { significant: 5 })}
        edit={(value) => editText(value, "frequency")}
        read={readFrequency}
        step={(value, direction) => Number(Math.min(HIGHEST, Math.max(LOWEST, value * 2 ** (direction / 3))).toPrecision(4))}
        onTake={(value) => ui.patch({ equationsAt: value })}
        onClear={() => ui.patch({ equationsAt: null })}
      />
      {isAsked && suggested !== frequency ? (
        <button type="button" className="button is-small" onClick={() => ui.patch({ equationsAt: null })}>
          {isBand ? `Back to ${name}` : "Back to 1 kHz"}
        </button>
      ) : (
        <span className="hint">{isBand ? "where the band works at full boost" : ""}</span>
      )}
      <span className="hint">
        On the sheet, <kbd>E</kbd> comes here with the frequency at the cursor.
      </span>
    </section>
  );
}
