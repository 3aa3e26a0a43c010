import type { CallInput, Endpoint, ResponseOf } from '#shared/schemas/endpoint.ts'
import { Problem } from '#shared/schemas/problem.ts'
import { endpointUrl, failure, problemFromBody, unexpectedAnswer } from './api-client.ts'

export interface Upload<E extends Endpoint> {
  /** Rejects with a {@link Problem}; its status is 0 where the connection broke, and {@link STOPPED} after `stop`. */
  readonly answer: Promise<ResponseOf<E>>
  stop(): void
}

/** The status of a {@link Problem} that tells of an upload which the reader stopped. */
export const STOPPED = 499

/**
 * Sends one file as multipart/form-data (field `file`). Over XMLHttpRequest, since fetch says nothing of how far a
 * request is. `onProgress` hears the bytes sent and the bytes in all, the frame of the form included.
 */
export function uploadFile<E extends Endpoint>(
  endpoint: E,
  input: Pick<CallInput<E>, 'params'>,
  file: File,
  onProgress: (sent: number, total: number) => void,
): Upload<E> {
  const request = new XMLHttpRequest()
  let sent = 0
  const answer = new Promise<ResponseOf<E>>((resolve, reject) => {
    request.upload.onprogress = (event) => {
      sent = event.loaded
      onProgress(event.loaded, event.lengthComputable ? event.total : file.size)
    }
    request.onload = () => {
      const body = parse(request.responseText)
      if (request.status < 200 || request.status > 299) {
        reject(new Problem(problemFromBody(request.status, body)))
        return
      }
      const parsed = endpoint.response.safeParse(body)
      if (parsed.success) resolve(parsed.data as ResponseOf<E>)
      else reject(new Problem(unexpectedAnswer()))
    }
    request.onerror = () => {
      reject(
        new Problem(
          failure(
            0,
            'The upload broke off',
            sent === 0
              ? 'The file could not be sent. Check the connection; if you changed the file after choosing it, choose it again.'
              : 'The connection broke before the whole file was there. Nothing was stored. Check it and send the file again.',
          ),
        ),
      )
    }
    request.onabort = () =>
      reject(new Problem(failure(STOPPED, 'Stopped', 'You stopped the upload. Nothing was stored.')))
  })
  const form = new FormData()
  form.append('file', file)
  request.open(endpoint.method, endpointUrl(endpoint, input as CallInput<E>))
  request.setRequestHeader('accept', 'application/json')
  request.send(form)
  return { answer, stop: () => request.abort() }
}

function parse(text: string): unknown {
  try {
    return JSON.parse(text)
  } catch {
    return undefined
  }
}
