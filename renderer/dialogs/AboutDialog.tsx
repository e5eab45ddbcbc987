import { useShell } from "../editor/hooks.ts";
import { DialogFrame } from "./DialogFrame.tsx";
import type { DialogProps } from "./QuestionDialogs.tsx";

/** What this is, and what its numbers rest on. */
export function AboutDialog({ close }: DialogProps<"about">) {
  const { version } = useShell();
  return (
    <DialogFrame
      title="About Bandwright"
      onDismiss={() => close(null)}
      foot={
        <button type="button" className="button is-primary" onClick={() => close(null)}>
          Close
        </button>
      }
    >
      <p>Version {version}. A design assistant for people who build analogue graphic equalizers. Everything is a file on this machine; nothing leaves it.</p>
      <h3>What the numbers are</h3>
      <p>Responses come from the node equations of the whole board: every band loads every other, op amps have their real bandwidth, sliders their real track. Band figures are found with that band's slider at an end and all others centred.</p>
      <h3>What they are not</h3>
      <ul className="fault-list">
        <li>Op-amp models hold typical values from memory: check the maker's current sheet.</li>
        <li>Signals are small: clipping, slewing and noise are not in the response.</li>
        <li>Mains supplies and earthing follow the rules where you are. Have someone qualified check them.</li>
      </ul>
    </DialogFrame>
  );
}
