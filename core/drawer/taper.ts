import type { SliderLaw } from "../model/project.ts";
import type { StockLine } from "./stock.ts";
import type { Problem } from "./stress.ts";

/** How a track's resistance goes with its travel. A power law is symmetrical about the middle, as a slider's `law` is; null where its exponent is not said. */
type Taper = { readonly name: "linear" | "logarithmic" | "reverse logarithmic" } | { readonly name: "power law"; readonly power: number | null };

/** Words only: the letters that makers use for tapers mean one thing here and another there. */
const REVERSE = /\b(?:reversed?|inversed?|inverted|anti|rev\.?|inv\.?|negative)[-\s]?(?:log(?:arithmi\w*)?|audio)\b/g;
/** What the word itself does not settle, such as `semi-log` or `log catalog`, is no taper. */
const LOGARITHMIC = /(?<!\b(?:semi|quasi|non|no|not)[-\s]?)\b(?:logarithmi\w*|log(?=\s*(?:$|[.,;()]|\d|(?:taper|law|curve|track|carbon|cermet|conductive|plastic)\b|(?:pot|potentiometer|slider|fader)s?\s*(?:$|[,;()]))))/;
const ANY_LOG = /\blog(?:arithmi\w*)?\b/;
/** The word alone may be what the track is for. */
const AUDIO = /\baudio\s+(?:taper|law)\b|(?:^|[,;])\s*audio\s*(?:$|[,;])/;
const LINEAR = /(?<!\b(?:semi|quasi|non|no|not)[-\s]?)\blin(?:ear)?\b/;
const POWER = /\bpower[-\s]law(?:\s+(?:of\s+)?(\d+(?:[.,]\d+)?))?/;
const SYMMETRICAL = /\b[sw][-\s](?:taper|law|curve)\b/;

/** What a line's technology says of its taper, such as `carbon, linear` or `cermet, power law 0.5`; null where it says nothing for certain, or two things. */
export function taperOf(line: Pick<StockLine, "technology">): Taper | null {
  const text = line.technology.toLowerCase();
  const rest = text.replaceAll(REVERSE, "");
  const [, power] = POWER.exec(text) ?? [];
  const found: Taper[] = [];
  if (rest !== text) found.push({ name: "reverse logarithmic" });
  const isLogarithmic = LOGARITHMIC.test(rest);
  if (!isLogarithmic && ANY_LOG.test(rest)) return null;
  if (isLogarithmic || AUDIO.test(rest)) found.push({ name: "logarithmic" });
  if (LINEAR.test(text)) found.push({ name: "linear" });
  if (POWER.test(text) || SYMMETRICAL.test(text)) found.push({ name: "power law", power: power === undefined ? null : Number(power.replace(",", ".")) });
  return found.length === 1 ? found[0] : null;
}

/** Exponents within 10 % of each other are one: no two tracks are more alike. */
const SAME_EXPONENT = Math.log(1.1);

/** A track's line against the law that the board reckons its slider with. A line that does not say is taken as fitting. */
export function taperProblems(law: SliderLaw, line: Pick<StockLine, "technology">): Problem[] {
  const note = (message: string): Problem[] => [{ level: "note", about: "taper", message }];
  const wanted = law === "linear" ? 1 : law.power;
  const taper = taperOf(line);
  if (taper === null) return note("taper not stated");
  const isSymmetrical = taper.name === "linear" || taper.name === "power law";
  const power = taper.name === "linear" ? 1 : taper.name === "power law" ? taper.power : null;
  const isOther = (a: number, b: number): boolean => Math.abs(Math.log(a / b)) > SAME_EXPONENT;
  if (isSymmetrical && power === null && isOther(wanted, 1)) return note("exponent of its taper not stated");
  if (isSymmetrical && power !== null && !isOther(power, wanted)) return [];
  const own = taper.name === "power law" && power !== null ? `a power law of ${power}` : taper.name === "power law" ? "a power law" : taper.name;
  return [{ level: "fault", about: "taper", message: `its taper is ${own}, but the slider's law is ${law === "linear" ? "linear" : `a power law of ${law.power}`}` }];
}
