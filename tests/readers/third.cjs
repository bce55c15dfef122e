// The third reader: counts what the `dxf-parser` package sees in each ASCII drawing named on a line of the input.
// Usage: node third.cjs FOLDER-OF-MODULES < NAMES > COUNTS; one JSON value per line, null where it cannot read.
const fs = require("fs");
const path = require("path");
const readline = require("readline");
const DxfParser = require(path.resolve(process.argv[2], "dxf-parser"));
const rows = readline.createInterface({ input: process.stdin });
rows.on("line", (name) => {
  let seen = null;
  try {
    // Its log of what it skips is no result.
    console.log = console.error = console.warn = () => {};
    const drawing = new DxfParser().parseSync(fs.readFileSync(name, "latin1"));
    const layers = drawing.tables && drawing.tables.layer ? Object.keys(drawing.tables.layer.layers).length : 0;
    seen = drawing.entities ? { entities: drawing.entities.length, layers } : null;
  } catch (error) {
    seen = null;
  }
  process.stdout.write(JSON.stringify(seen) + "\n");
});
