import { createReadStream } from 'node:fs'
import { lstat, readdir, readFile } from 'node:fs/promises'
import { join } from 'node:path'
import { ArchiveError } from '#shared/archive/archive-error.ts'
import type { MembersSource } from '#shared/archive/members-source.ts'
import { parseSums, SUMS_MEMBER } from '#shared/archive/sums.ts'
import { MAX_UNPACKED } from '#shared/archive/zip-format.ts'

/**
 * The files of a folder into which a proof archive was unpacked: SHA256SUMS and what it names. Anything else that lies
 * there is a stray. Throws ArchiveError for links, folders, files that are not there, and over 1 GiB.
 */
export async function openFolder(folder: string): Promise<MembersSource> {
  const present = (await readdir(folder)).sort()
  if (!present.includes(SUMS_MEMBER)) {
    throw new ArchiveError(
      'member-missing',
      SUMS_MEMBER,
      'The folder has no SHA256SUMS: it is no unpacked proof archive.',
    )
  }
  const sizes = new Map<string, number>()
  let total = 0
  const add = async (name: string) => {
    if (!present.includes(name)) throw missing(name)
    const file = await lstat(join(folder, name))
    if (!file.isFile()) throw new ArchiveError('zip-not-a-file', name, `${name} is not an ordinary file.`)
    total += file.size
    if (total > MAX_UNPACKED) {
      throw new ArchiveError('archive-too-large', name, `With ${name}, the folder holds over 1 GiB.`)
    }
    sizes.set(name, file.size)
  }
  await add(SUMS_MEMBER)
  if ((sizes.get(SUMS_MEMBER) ?? 0) <= 2 ** 20) {
    const sums = parseSums(new Uint8Array(await readFile(join(folder, SUMS_MEMBER))))
    // Where the sums cannot be read, the check says so: it reads them itself.
    for (const name of sums.ok ? sums.value.keys() : present.filter((name) => name !== SUMS_MEMBER)) await add(name)
  }
  const find = (name: string) => {
    const size = sizes.get(name)
    if (size === undefined) throw missing(name)
    return size
  }
  return {
    names: [...sizes.keys()],
    strays: present.filter((name) => !sizes.has(name)),
    size: find,
    open: (name) => readPieces(join(folder, name), name, find(name)),
  }
}

function missing(name: string): ArchiveError {
  return new ArchiveError('member-missing', name, `The folder has no ${name}.`)
}

async function* readPieces(path: string, name: string, size: number): AsyncGenerator<Uint8Array> {
  let read = 0
  for await (const chunk of createReadStream(path, { highWaterMark: 65_536 })) {
    read += (chunk as Uint8Array).length
    yield chunk as Uint8Array
  }
  if (read !== size) throw new ArchiveError('member-size', name, `${name} changed while it was being read.`)
}
