import { writeWhole } from "../../app/services/write-whole.ts";

// Run as a program of its own, to be killed at any moment: writes one of two long texts, again and again.
const [path = ""] = process.argv.slice(2);
for (let round = 0; ; round += 1) {
  await writeWhole(path, (round % 2 === 0 ? "a" : "b").repeat(2_000_000));
  if (round === 1) console.log("writing");
}
