import { createHash, randomBytes } from 'node:crypto'
import { existsSync, mkdirSync, readdirSync, readFileSync, renameSync, rmdirSync, rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import type { ChecksumAlgorithm } from './checksums.ts'
import type { DefaultRetention, Retention } from './retention.ts'

/** Object headers that a client sets and gets back. */
export interface ObjectHeaders {
  readonly contentType: string
  readonly other: Readonly<Record<string, string>>
  readonly metadata: Readonly<Record<string, string>>
}

export interface ObjectVersion {
  readonly key: string
  /** 'null' in a bucket without versions. */
  readonly versionId: string
  /** Grows with every write of the bucket: the order of a key's versions. */
  readonly sequence: number
  readonly lastModified: string
  readonly deleteMarker: boolean
  readonly size: number
  /** Without quotes. */
  readonly etag: string
  readonly checksum?: {
    readonly algorithm: ChecksumAlgorithm
    readonly value: string
    readonly type: 'FULL_OBJECT' | 'COMPOSITE'
  }
  readonly headers: ObjectHeaders
  readonly retention?: Retention
}

export interface BucketSettings {
  readonly createdAt: string
  readonly versioning: 'Enabled' | 'Suspended' | 'None'
  readonly objectLock: boolean
  readonly defaultRetention?: DefaultRetention
}

export const versionIsOf = (versionId: string | undefined) => (version: ObjectVersion) =>
  version.versionId === versionId

/** One bucket: settings, versions by key (newest first) and their bytes, all on disk, so a restart has the same. */
export class Bucket {
  private readonly versions = new Map<string, ObjectVersion[]>()
  private sequence = 0

  constructor(
    readonly name: string,
    private readonly folder: string,
    public settings: BucketSettings,
  ) {
    mkdirSync(join(folder, 'objects'), { recursive: true })
    for (const hash of readdirSync(join(folder, 'objects')))
      for (const file of readdirSync(join(folder, 'objects', hash)))
        if (file.endsWith('.json')) this.remember(readJson<ObjectVersion>(join(folder, 'objects', hash, file)))
  }

  get versioned(): boolean {
    return this.settings.versioning !== 'None'
  }

  changeSettings(settings: BucketSettings): void {
    this.settings = settings
    writeJson(join(this.folder, 'bucket.json'), settings)
  }

  keys(): string[] {
    return [...this.versions.keys()]
  }

  versionsOf(key: string): readonly ObjectVersion[] {
    return this.versions.get(key) ?? []
  }

  /** The newest version, if it is not a delete marker. */
  current(key: string): ObjectVersion | undefined {
    const newest = this.versionsOf(key)[0]
    return newest && !newest.deleteMarker ? newest : undefined
  }

  dataPath(version: ObjectVersion): string {
    return this.path(version, 'data')
  }

  /** Takes the received file over as the newest version; without versioning it replaces what was there. */
  add(
    version: Omit<ObjectVersion, 'versionId' | 'sequence'>,
    /** The bytes; undefined for a delete marker. */
    dataPath: string | undefined,
  ): ObjectVersion {
    const versionId = this.settings.versioning === 'Enabled' ? randomBytes(24).toString('base64url') : 'null'
    const old = this.versionsOf(version.key).find(versionIsOf(versionId))
    if (old) this.remove(old)
    const whole: ObjectVersion = { ...version, versionId, sequence: this.sequence + 1 }
    mkdirSync(this.keyFolder(version.key), { recursive: true })
    if (dataPath !== undefined) renameSync(dataPath, this.path(whole, 'data'))
    // The description comes last and at once: a version exists from here on.
    writeJson(this.path(whole, 'json'), whole)
    this.remember(whole)
    return whole
  }

  replace(version: ObjectVersion): void {
    writeJson(this.path(version, 'json'), version)
    const list = this.versions.get(version.key) ?? []
    this.versions.set(
      version.key,
      list.map((old) => (old.versionId === version.versionId ? version : old)),
    )
  }

  remove(version: ObjectVersion): void {
    rmSync(this.path(version, 'json'), { force: true })
    rmSync(this.path(version, 'data'), { force: true })
    const rest = this.versionsOf(version.key).filter((other) => other.versionId !== version.versionId)
    if (rest.length > 0) this.versions.set(version.key, rest)
    else {
      this.versions.delete(version.key)
      rmdirSync(this.keyFolder(version.key))
    }
  }

  private remember(version: ObjectVersion): void {
    this.sequence = Math.max(this.sequence, version.sequence)
    const list = [...this.versionsOf(version.key), version]
    this.versions.set(
      version.key,
      list.sort((a, b) => b.sequence - a.sequence),
    )
  }

  /** A key can hold any character, so its folder is named by its digest. */
  private keyFolder(key: string): string {
    return join(this.folder, 'objects', createHash('sha256').update(key).digest('hex'))
  }

  private path(version: ObjectVersion, ending: 'json' | 'data'): string {
    return join(this.keyFolder(version.key), `${version.versionId}.${ending}`)
  }
}

/** All buckets below one folder. */
export class Store {
  private readonly buckets = new Map<string, Bucket>()
  readonly uploadsFolder: string
  private readonly incoming: string

  constructor(private readonly folder: string) {
    this.uploadsFolder = join(folder, 'uploads')
    this.incoming = join(folder, 'incoming')
    // What was being received when the process ended was never answered: it is dropped.
    rmSync(this.incoming, { recursive: true, force: true })
    for (const path of [this.uploadsFolder, this.incoming, join(folder, 'buckets')])
      mkdirSync(path, { recursive: true })
    for (const name of readdirSync(join(folder, 'buckets'))) {
      const file = join(folder, 'buckets', name, 'bucket.json')
      if (existsSync(file)) this.buckets.set(name, new Bucket(name, join(folder, 'buckets', name), readJson(file)))
    }
  }

  bucket(name: string): Bucket | undefined {
    return this.buckets.get(name)
  }

  names(): string[] {
    return [...this.buckets.keys()].sort()
  }

  create(name: string, settings: BucketSettings): Bucket {
    const bucket = new Bucket(name, join(this.folder, 'buckets', name), settings)
    bucket.changeSettings(settings)
    this.buckets.set(name, bucket)
    return bucket
  }

  delete(name: string): void {
    this.buckets.delete(name)
    rmSync(join(this.folder, 'buckets', name), { recursive: true, force: true })
  }

  /** A path for a body that is being received. */
  temporaryPath(): string {
    return join(this.incoming, randomBytes(12).toString('hex'))
  }
}

export const readJson = <T>(path: string) => JSON.parse(readFileSync(path, 'utf8')) as T

/** Writes a file so that a reader sees the old or the new content, never half of it. */
export function writeJson(path: string, value: unknown): void {
  writeFileSync(`${path}.new`, JSON.stringify(value, undefined, 1))
  renameSync(`${path}.new`, path)
}
