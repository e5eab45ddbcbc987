import { useMemo } from "react";
import type { BandFigures } from "../../core/analysis/bands.ts";
import { BLOCKS } from "../../core/blocks/index.ts";
import { formatDb, formatFigure } from "../../core/units.ts";
import { useShell } from "../editor/hooks.ts";
import { WarningSign } from "../panels/Stability.tsx";
import { useAccount, useUnstableEnds } from "../worker/hooks.ts";
import { accountModel, lossText, type AccountRow } from "./account-model.ts";

/** Where a band's boost goes: from the sum on paper to the peak in circuit, share by share. */
export function AccountSection({ figure }: { readonly figure: BandFigures }) {
  const { editor } = useShell().context;
  const { value, isCurrent, failure } = useAccount(figure.id);
  const model = useMemo(() => (value ? accountModel(value) : null), [value]);
  const isVoid = useUnstableEnds().some(({ id, end }) => id === figure.id && end === "boost");
  const { frequency, q, peak } = figure.boost;
  return (
    <section className={isCurrent ? "equations-section" : "equations-section is-stale"} aria-label="In circuit" aria-busy={!isCurrent && failure === null}>
      <h3>
        In circuit, the other sliders centred
        {!isCurrent && failure === null && <span className="computing"> computing…</span>}
      </h3>
      {isVoid && (
        <p className="void-note">
          <WarningSign /> Unstable at full boost: what is struck means nothing.
        </p>
      )}
      <p className={isVoid ? "is-circuit-figure is-void" : "is-circuit-figure"} data-testid="in-circuit">
        Full boost {formatDb(peak, 2)}
        {frequency === null ? "" : BLOCKS[figure.kind].shape === "resonance" ? ` at ${formatFigure(frequency, "frequency")}` : `, half-gain corner ${formatFigure(frequency, "frequency")}`}
        {q === null ? "" : `, Q ${formatFigure(q, "plain")}`}; on paper {formatDb(figure.isolatedBoost, 2)}.
      </p>
      {failure !== null && <p className="caution">{failure}</p>}
      {model && failure === null && (
        <>
          <p className="visually-hidden">{model.summary}</p>
          <ol className={isVoid ? "account is-circuit-figure is-void" : "account is-circuit-figure"} aria-label="What takes from the boost">
            {model.rows.map((row, index) => (
              <AccountBar key={row.id} row={row} isOwn={index === model.rows.length - 1} onShow={() => editor.select([row.id])} />
            ))}
          </ol>
          {model.rest !== "" && <p className="hint">{model.rest}</p>}
          <p className={isVoid ? "account-total is-circuit-figure is-void" : "account-total is-circuit-figure"} data-testid="account-total">
            <span>isolated − lost = in circuit</span>
            <strong>{model.total}</strong>
          </p>
          <p className="hint">Each band is charged as all grow onto the bus together (Aumann and Shapley): no order is involved, and the shares add up to the whole.</p>
        </>
      )}
    </section>
  );
}

interface AccountBarProps {
  readonly row: AccountRow;
  readonly isOwn: boolean;
  readonly onShow: () => void;
}

function AccountBar({ row, isOwn, onShow }: AccountBarProps) {
  const kind = isOwn ? "is-own" : row.loss < 0 ? "is-gain" : "";
  return (
    <li className={`account-row ${kind}`}>
      {isOwn ? (
        <span className="account-name">{row.label}</span>
      ) : (
        <button type="button" className="account-name is-link" onClick={onShow}>
          {row.label}
        </button>
      )}
      <span className="account-track" aria-hidden="true">
        <span className="account-bar" style={{ width: `${Math.max(0.4, row.length * 100)}%` }} />
      </span>
      <span className="account-loss">{lossText(row.loss)}</span>
    </li>
  );
}
