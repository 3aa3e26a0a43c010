// Builds build/check/: check.mjs as it stands, and beside it bls12-381.mjs, the BLS12-381 library that it needs, in one readable file
// with its licences on top. Both go into every proof archive. The output is the same bytes for the same package versions.
import { mkdirSync, readFileSync, renameSync, writeFileSync } from 'node:fs'
import { dirname, join, relative } from 'node:path'
import { fileURLToPath } from 'node:url'
import { build } from 'vite'

const here = dirname(fileURLToPath(import.meta.url))
const root = join(here, '..', '..')
const out = join(root, 'build', 'check')

/** The licence of a package, as a comment that names its version. */
function licence(name) {
  const folder = join(root, 'node_modules', name)
  const { version } = JSON.parse(readFileSync(join(folder, 'package.json'), 'utf8'))
  const words = readFileSync(join(folder, 'LICENSE'), 'utf8').trim().split('\n')
  return [`${name} ${version}`, '', ...words].map((line) => `// ${line}`.trimEnd()).join('\n')
}

const entry = '\0bls-entry'
const result = await build({
  root,
  configFile: false,
  logLevel: 'warn',
  publicDir: false,
  plugins: [
    {
      name: 'bls-entry',
      // check.mjs needs the curve with its pairing, and nothing else of the library.
      resolveId: (id) => (id === 'bls-entry' ? entry : undefined),
      load: (id) => (id === entry ? "export { bls12_381 } from '@noble/curves/bls12-381.js'" : undefined),
    },
  ],
  build: {
    write: false,
    minify: false,
    target: 'es2022',
    lib: { entry: 'bls-entry', formats: ['es'] },
    rollupOptions: { input: 'bls-entry' },
  },
})
const [{ output }] = [result].flat()
const chunks = output.filter((item) => item.type === 'chunk')
if (chunks.length !== 1 || chunks[0].imports.length > 0)
  throw new Error('The BLS library did not become one file without imports.')

const { code } = chunks[0]
if (code.includes(root)) throw new Error('The bundle names a folder of this machine.')

const head = `// BLS12-381 for check.mjs: a bundle of the two packages below, unchanged but for being joined.
// The same can be built from the packages as published, which are the place to audit it.
//
${licence('@noble/curves')}
//
${licence('@noble/hashes')}

`
mkdirSync(out, { recursive: true })
// Each file is put in place whole: a check that starts meanwhile never reads half of one.
for (const [name, text] of [
  ['bls12-381.mjs', head + code],
  ['check.mjs', readFileSync(join(here, 'check.mjs'), 'utf8')],
]) {
  const waiting = join(out, `.${name}.${process.pid}`)
  writeFileSync(waiting, text)
  renameSync(waiting, join(out, name))
}
console.log(`Wrote ${relative(root, out)}/check.mjs and bls12-381.mjs`)
