// What makes the check worth having: it leans on nothing of the product, and the product leans on nothing here.
import { readdirSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import ts from 'typescript'
import { describe, expect, it } from 'vitest'
import { builtCheck } from './run-check.ts'

const root = join(import.meta.dirname, '../..')

/** Every module that a source text can load; a name that is not a literal, and other ways to load, come back as "?". */
function loads(text: string): string[] {
  const found: string[] = []
  const note = (node: ts.Node | undefined): void => {
    found.push(node && ts.isStringLiteralLike(node) ? node.text : '?')
  }
  const visit = (node: ts.Node): void => {
    if (ts.isImportDeclaration(node)) note(node.moduleSpecifier)
    else if (ts.isExportDeclaration(node) && node.moduleSpecifier) note(node.moduleSpecifier)
    else if (ts.isCallExpression(node) && node.expression.kind === ts.SyntaxKind.ImportKeyword) note(node.arguments[0])
    else if (
      ts.isIdentifier(node) &&
      ['require', 'createRequire', 'eval', 'Function', 'getBuiltinModule'].includes(node.text)
    ) {
      found.push('?')
    }
    ts.forEachChild(node, visit)
  }
  visit(ts.createSourceFile('module.mjs', text, ts.ScriptTarget.Latest, true, ts.ScriptKind.JS))
  return found
}

const filesUnder = (folder: string): string[] =>
  readdirSync(join(root, folder), { recursive: true, encoding: 'utf8' })
    .filter((name) => /\.(ts|tsx|mjs)$/.test(name))
    .map((name) => join(folder, name))

describe('the list of what a text loads', () => {
  it.each([
    ["import { a } from 'zod'", 'zod'],
    ["import 'zod'", 'zod'],
    ["export * from '../shared/x.ts'", '../shared/x.ts'],
    ["const x = await import('zod')", 'zod'],
    ['const x = await import(name)', '?'],
    ["const x = require('zod')", '?'],
    ["process.getBuiltinModule('fs')", '?'],
    ["new Function('return 1')()", '?'],
  ])('sees %s', (text, expected) => {
    expect(loads(text)).toEqual([expected])
  })
})

describe('check.mjs', () => {
  const allowed = (name: string): boolean => name.startsWith('node:') || name === './bls12-381.mjs'

  it('imports nothing but node: built-ins and the library beside it', () => {
    const imports = loads(readFileSync(join(root, 'server/check/check.mjs'), 'utf8'))
    expect(imports).toContain('./bls12-381.mjs')
    expect(imports.filter((name) => !allowed(name))).toEqual([])
  })

  it('opens no connection and writes no file', () => {
    const text = readFileSync(join(root, 'server/check/check.mjs'), 'utf8')
    const imports = loads(text).filter((name) => name.startsWith('node:'))
    expect(imports.sort()).toEqual(['node:crypto', 'node:fs', 'node:path', 'node:url', 'node:zlib'])
    expect(text).not.toMatch(/\b(write|append|unlink|rm|rename|mkdir|copy|open)\w*Sync\b|\bfetch\(|WebSocket/)
  })

  it('ships as it stands in the source, with a library that imports nothing and carries its licences', () => {
    const built = builtCheck()
    expect(readFileSync(join(built, 'check.mjs'))).toEqual(readFileSync(join(root, 'server/check/check.mjs')))
    const library = readFileSync(join(built, 'bls12-381.mjs'), 'utf8')
    expect(loads(library)).toEqual([])
    expect(library.match(/^\/\/ The MIT License/gm)).toHaveLength(2)
    expect(library.match(/^export .*/gm)).toEqual(['export { bls12_381 };'])
    expect(library).not.toContain(root)
  })
})

describe('the second implementation', () => {
  it('shares no code with the product', () => {
    const outside = filesUnder('tests/reference')
      .filter((file) => !file.endsWith('differential.test.ts'))
      .flatMap((file) => loads(readFileSync(join(root, file), 'utf8')).map((name) => `${file}: ${name}`))
      .filter(
        (line) =>
          !/: (\.\/[\w-]+\.ts|node:[\w/]+|vitest|typescript|@noble\/curves\/(bls12-381|ed25519)\.js)$/.test(line),
      )
    expect(outside.filter((line) => !line.startsWith('tests/reference/independence.test.ts: ?'))).toEqual([])
  })

  it('is not imported by the product', () => {
    const users = ['shared', 'server', 'src']
      .flatMap(filesUnder)
      .filter((file) => loads(readFileSync(join(root, file), 'utf8')).some((name) => name.includes('tests/')))
    expect(users).toEqual([])
  })
})
