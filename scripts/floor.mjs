// The floor of the benchmark: decode the file with the package tiff, add up every frame once, nothing else.
import { readFileSync } from "node:fs";
import { decode } from "tiff";

for (const page of decode(readFileSync(process.argv[2]))) {
  let sum = 0;
  for (const value of page.data) sum += value;
  if (!Number.isFinite(sum)) throw new RangeError("a frame does not add up");
}
