import { runVectors } from './vectors/run-vectors.ts'

/** `npm run vectors -- FOLDER`: checks a folder of check values for the record format; exit 1 at a wrong value. */
const folder = process.argv[2]
if (folder === undefined || process.argv.length > 3) {
  console.error('Name one folder: npm run vectors -- tests/vectors')
  process.exitCode = 2
} else if (!(await runVectors(folder, (line) => console.log(line)))) {
  process.exitCode = 1
}
