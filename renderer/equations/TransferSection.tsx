import { formatValue } from "../../core/units.ts";
import type { TransferModel } from "./block-model.ts";
import { Tex } from "./Tex.tsx";

interface TransferSectionProps {
  readonly model: TransferModel;
  readonly frequency: number;
}

/** A stage's transfer function in leg admittances, with the numbers of one frequency. */
export function TransferSection({ model, frequency }: TransferSectionProps) {
  const at = formatValue(frequency, "frequency", { significant: 5 });
  return (
    <section className="equations-section" aria-label="Transfer function">
      <h3>Transfer function, ideal op amp and stiff reference</h3>
      {model.forms.map((tex) => (
        <p key={tex} className="equation">
          <Tex tex={tex} />
        </p>
      ))}
      <h4>At {at}</h4>
      <p className="equation is-circuit-figure">
        <Tex tex={model.numbers} />
      </p>
      {model.bands.length > 0 && (
        <div className="table-scroll">
          <table className="plain-table is-circuit-figure">
            <thead>
              <tr>
                <th scope="col">band</th>
                <th scope="col">leg admittance Y</th>
                <th scope="col">with its track, Y′</th>
                <th scope="col">R boost</th>
                <th scope="col">R cut</th>
              </tr>
            </thead>
            <tbody>
              {model.bands.map((band) => (
                <tr key={band.id}>
                  <th scope="row">{band.label}</th>
                  <td>{band.admittance}</td>
                  <td>{band.loaded}</td>
                  <td>{band.boostR}</td>
                  <td>{band.cutR}</td>
                </tr>
              ))}
            </tbody>
          </table>
        </div>
      )}
      <p className="is-circuit-figure" data-testid="transfer-gain">
        The whole chain in this form {model.onPaper}; with its real op amps and reference {model.real}.
      </p>
    </section>
  );
}
