import type { StockKind, StockLine } from "./stock.ts";

/** What values of a kind are measured in; null for op amps, which have a type instead. */
export const QUANTITY_OF = { resistor: "resistance", potentiometer: "resistance", capacitor: "capacitance", inductor: "inductance", "op-amp": null } as const satisfies Record<StockKind, string | null>;

/** What a kind's rating is in; null where it has none. */
export const RATING_UNIT = { resistor: "W", potentiometer: "W", capacitor: "V", inductor: null, "op-amp": null } as const satisfies Record<StockKind, string | null>;

const TEXTS = [["type", "type"], ["technology", "technology"], ["package", "package"], ["location", "location"], ["supplier", "supplier"], ["orderCode", "order code"], ["notes", "notes"]] as const;

/** Most characters of a text, and of the notes; most price breaks. */
export const MOST_CHARACTERS = 200;
export const MOST_NOTES = 10_000;
export const MOST_PRICES = 50;

/**
 * What is wrong with a line, in words; nothing where it can be kept. What is as it was `before` an edit may be of any
 * length: a line of an older drawer, which had no limits, can still be worked on.
 */
export function lineProblems(line: StockLine, before?: StockLine): readonly string[] {
  const problems: string[] = [];
  const complain = (message: string): void => void problems.push(message);

  if (line.id.trim() === "") complain("it needs an id");
  else if (line.id !== line.id.trim() || /\p{Cc}/u.test(line.id)) complain("its id must not begin or end with a space, and be on one line");
  if (line.id.length > 100 && line.id !== before?.id) complain("its id has more than 100 characters");

  for (const [field, name] of TEXTS) {
    const most = field === "notes" ? MOST_NOTES : MOST_CHARACTERS;
    if ((line[field] ?? "").length > most && line[field] !== before?.[field]) complain(`its ${name} ${field === "notes" ? "have" : "has"} more than ${most} characters`);
  }
  if (line.prices.length > MOST_PRICES && line.prices !== before?.prices) complain(`it has more than ${MOST_PRICES} prices`);

  if (line.kind === "op-amp") {
    if (line.value !== null) complain("an op amp has a type, and no value");
    if (line.type === null || line.type.trim() === "") complain("an op amp needs its type, such as TL072");
  } else {
    if (line.value === null) complain(`${aKind(line.kind)} needs a value`);
    else if (!(line.value > 0 && Number.isFinite(line.value))) complain(`its value must be a number above 0, got ${line.value}`);
    if (line.type !== null) complain(`only op amps have a type, ${aKind(line.kind)} has none`);
  }
  if (line.tolerance !== null && !(line.tolerance >= 0 && line.tolerance <= 1)) complain(`its tolerance must be from 0 to 100 %, got ${percent(line.tolerance)}`);
  if (line.rating !== null && !(line.rating > 0 && Number.isFinite(line.rating))) complain(`its rating must be a number above 0, got ${line.rating}`);
  if (line.temperatureCoefficient !== null && !(Math.abs(line.temperatureCoefficient) <= 0.1)) complain("its temperature coefficient must be from −100 000 to 100 000 ppm/K");
  if (line.windingR !== null) {
    if (line.kind !== "inductor") complain(`only inductors have a winding resistance, ${aKind(line.kind)} has none`);
    else if (!(line.windingR > 0 && Number.isFinite(line.windingR))) complain(`its winding resistance must be a number above 0, got ${line.windingR}`);
  }
  if (line.currency !== "" && !/^[A-Z]{3}$/.test(line.currency)) complain(`its currency must be a code of three letters, such as EUR, got “${line.currency}”`);
  line.prices.forEach(({ from, unitCost }, index) => {
    if (!(unitCost >= 0 && Number.isFinite(unitCost))) complain(`its price from ${from} must be 0 or more, got ${unitCost}`);
    if (!Number.isSafeInteger(from) || from < 1) complain(`a price must hold from a whole number of pieces, got ${from}`);
    const last = line.prices[index - 1];
    if (last === undefined ? from !== 1 : from <= last.from) complain(last === undefined ? "its first price must hold from 1 piece" : "its prices must go up in number of pieces");
  });
  return problems;
}

function aKind(kind: StockKind): string {
  return kind === "op-amp" ? "an op amp" : kind === "inductor" ? "an inductor" : `a ${kind}`;
}

function percent(fraction: number): string {
  return `${Number((fraction * 100).toPrecision(6))} %`;
}
