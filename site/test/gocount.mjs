// Counts the tests of "go test -json", prints a line a package and what the failed ones said.
import { readFileSync, writeFileSync } from "node:fs";

const [from, to] = process.argv.slice(2);
const output = new Map();
let passed = 0, failed = 0;
for (const line of readFileSync(from, "utf8").split("\n").filter(Boolean)) {
  const e = JSON.parse(line);
  const key = `${e.Package} ${e.Test ?? ""}`;
  if (e.Action === "output") output.set(key, (output.get(key) ?? "") + e.Output);
  if (e.Action === "build-output") console.log(e.Output);
  if (!e.Test) {
    if (e.Action === "pass") console.log(`ok    ${e.Package} ${e.Elapsed}s`);
    if (e.Action === "fail") {
      console.log(`FAIL  ${e.Package}\n${output.get(key) ?? ""}`);
      failed++;
    }
    continue;
  }
  if (e.Action === "pass") passed++;
  if (e.Action === "fail") console.log(output.get(key) ?? key);
}
writeFileSync(to, `${passed} ${failed}\n`);
