import { useState } from "react";
import { formatValue } from "../../core/units.ts";
import type { NodeModel, NodesModel } from "./block-model.ts";
import { Tex } from "./Tex.tsx";

interface NodesSectionProps {
  readonly model: NodesModel;
  readonly frequency: number;
}

/** Kirchhoff's sum at every node of a block, with the voltage and the currents of one frequency, for 1 V at the source. */
export function NodesSection({ model, frequency }: NodesSectionProps) {
  const [open, setOpen] = useState<ReadonlySet<string>>(() => new Set(model.nodes.slice(0, 1).map(({ node }) => node)));
  const isAllOpen = model.nodes.every(({ node }) => open.has(node));
  return (
    <section className="equations-section" aria-label="Node equations">
      <header className="section-head">
        <h3>Node equations: the currents out of each node add up to 0</h3>
        {model.nodes.length > 1 && (
          <button type="button" className="button is-small" onClick={() => setOpen(isAllOpen ? new Set() : new Set(model.nodes.map(({ node }) => node)))}>
            {isAllOpen ? "Fold all" : "Unfold all"}
          </button>
        )}
      </header>
      <p className="hint">Voltages and currents for 1 V at the source, {formatValue(frequency, "frequency", { significant: 5 })}. These are the equations that every result here is solved from.</p>
      {model.nodes.map((node) => (
        <Node
          key={node.node}
          node={node}
          isOpen={open.has(node.node)}
          onToggle={(isOpen) =>
            setOpen((now) => {
              const next = new Set(now);
              if (isOpen) next.add(node.node);
              else next.delete(node.node);
              return next;
            })
          }
        />
      ))}
      {model.branches.length > 0 && <h4>Laws of sources, coils and op amps</h4>}
      {model.branches.map(({ part, lines }) => (
        <div key={part}>
          {lines.map((tex) => (
            <p key={tex} className="equation">
              <Tex tex={tex} />
            </p>
          ))}
        </div>
      ))}
    </section>
  );
}

interface NodeProps {
  readonly node: NodeModel;
  readonly isOpen: boolean;
  readonly onToggle: (isOpen: boolean) => void;
}

function Node({ node, isOpen, onToggle }: NodeProps) {
  return (
    <details className="node" open={isOpen} onToggle={(event) => event.currentTarget.open !== isOpen && onToggle(event.currentTarget.open)} data-node={node.node}>
      <summary>
        <span className="node-name">{node.node}</span>
        <span className="node-volts is-circuit-figure">{node.volts}</span>
      </summary>
      {isOpen && (
        <div className="node-body">
          <p className="equation">
            <Tex tex={node.tex} />
          </p>
          <div className="table-scroll">
            <table className="plain-table is-circuit-figure">
              <thead>
                <tr>
                  <th scope="col">current in</th>
                  <th scope="col" className="is-text">towards</th>
                  <th scope="col">size ∠ angle</th>
                </tr>
              </thead>
              <tbody>
                {node.currents.map(({ key, part, towards, amperes }) => (
                  <tr key={key}>
                    <th scope="row">{part}</th>
                    <td className="is-text">{towards}</td>
                    <td>{amperes}</td>
                  </tr>
                ))}
              </tbody>
            </table>
          </div>
        </div>
      )}
    </details>
  );
}
