import { openDrawer } from "../../app/store/drawer-store.ts";

// Run as a program of its own, to be killed at any moment, or beside others on the same drawer.
// Buys one piece at a time, and says so when it is in the drawer: what was said has to be there afterwards.
const [path = "", rounds = "200", reference = ""] = process.argv.slice(2);
const drawer = await openDrawer({ path, now: () => new Date() });
for (let round = 0; round < Number(rounds); round += 1) {
  const { step } = drawer.move([{ line: "R-1", kind: "bought", count: 1, reference, note: "" }]);
  process.stdout.write(`${step}\n`);
  if (round % 10 === 9) drawer.editLines(["R-1"], { location: `${reference} ${round}` });
}
drawer.close();
