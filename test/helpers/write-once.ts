import { systemCode } from "../../app/services/system-error.ts";
import { writeWhole } from "../../app/services/write-whole.ts";

// Run as a program of its own, under a limit on file sizes: prints the system's code of the failed write.
const [path = "", size = "0"] = process.argv.slice(2);
try {
  await writeWhole(path, "x".repeat(Number(size)));
  console.log("written");
} catch (error) {
  console.log(systemCode(error));
}
