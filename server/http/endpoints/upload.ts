import type { Readable } from 'node:stream'
import type { Request, RequestHandler } from 'express'
import multer from 'multer'
import { MAX_FILE_BYTES } from '#shared/entrants/file-limit.ts'
import type { Upload } from '#server/http/endpoints/context.ts'
import { problem } from '#server/http/problems.ts'

/** What a multipart frame adds at most. */
const FRAME = 64 * 1000

const tooLarge = () =>
  problem(413, 'This file is larger than 200 MB. Split it into several files and import them one after another.', {
    code: 'file-too-large',
    errors: [{ field: 'file', message: 'Choose a file of at most 200 MB.' }],
  })
const noFile = () =>
  problem(422, 'No file came with this request.', {
    code: 'invalid-fields',
    errors: [{ field: 'file', message: 'Choose a CSV file.' }],
  })

const answers = new WeakMap<Request, unknown>()

/**
 * Streams the one file of a multipart/form-data request (RFC 7578, field `file`) into `receive` while it arrives; what
 * that answers goes to {@link uploadAnswer}. A file that breaks off or is too large makes its bytes throw.
 */
export function receiveUpload(
  receive: (request: Request, upload: Upload) => Promise<unknown>,
  maxBytes = MAX_FILE_BYTES,
): RequestHandler[] {
  const storage: multer.StorageEngine = {
    _handleFile(request, file, done) {
      const broken = new AbortController()
      const bytes = whole(file.stream, broken)
      // Whoever has read enough leaves the rest: it runs out, so that its sender reads the answer.
      const runOut = async () => {
        await bytes.return(undefined).catch(() => undefined)
        file.stream.resume()
      }
      const upload: Upload = {
        fileName: file.originalname.slice(-200),
        bytesTotal: Number(request.headers['content-length'] ?? 0) || 0,
        bytes,
        signal: broken.signal,
      }
      receive(request, upload).then(
        (answer) => {
          answers.set(request, answer)
          void runOut()
          done(null, {})
        },
        (error: unknown) => {
          void runOut()
          done(error)
        },
      )
    },
    // Nothing was kept outside the database, and there the command itself tidies up.
    _removeFile: (_request, _file, done) => done(null),
  }
  const parse = multer({
    storage,
    defParamCharset: 'utf8',
    limits: { fileSize: maxBytes, files: 1, fields: 10, fieldSize: 10_000, parts: 12 },
  }).single('file')
  return [
    (request, response, next) => {
      if (!request.is('multipart/form-data')) {
        return next(problem(415, 'Send the file as multipart/form-data, in a field named "file".'))
      }
      if (Number(request.headers['content-length'] ?? 0) > maxBytes + FRAME) {
        // Not worth reading to its end only to refuse it.
        response.setHeader('Connection', 'close')
        return next(tooLarge())
      }
      parse(request, response, (error: unknown) => next(error ? explain(error) : undefined))
    },
    (request, _response, next) => next(answers.has(request) ? undefined : noFile()),
  ]
}

export const uploadAnswer = (request: Request): unknown => answers.get(request)

async function* whole(stream: Readable, broken: AbortController): AsyncGenerator<Uint8Array> {
  try {
    // A reader that stops at a fault must not destroy the stream: the parser takes that for an upload that broke off.
    for await (const chunk of stream.iterator({ destroyOnReturn: false })) yield chunk as Uint8Array
    // The parser cuts a file at the limit and ends it as if that were all.
    if ((stream as { truncated?: boolean }).truncated) throw tooLarge()
  } catch (error) {
    broken.abort(error)
    throw error
  }
}

function explain(error: unknown): unknown {
  if (error instanceof multer.MulterError) {
    switch (error.code) {
      case 'LIMIT_FILE_SIZE':
        return tooLarge()
      case 'LIMIT_UNEXPECTED_FILE':
      case 'LIMIT_FILE_COUNT':
        return noFile()
      default:
        return problem(400, 'The upload is not written as a form with one file. Try again from the import page.')
    }
  }
  if (
    error instanceof Error &&
    /^(Unexpected end of form|Request (aborted|closed)|Malformed|Multipart:)/.test(error.message)
  ) {
    return problem(400, 'The upload broke off before its end. Nothing was stored. Try again.', {
      code: 'upload-broken',
    })
  }
  return error
}
