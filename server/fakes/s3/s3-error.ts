import { element, xmlDocument } from './xml.ts'

/** An error answer of the S3 protocol. Codes and statuses: Amazon S3 API reference, "Error responses". */
export class S3Error extends Error {
  constructor(
    readonly code: string,
    readonly status: number,
    message: string,
    /** Further members of the error document, in their order. */
    readonly details: Readonly<Record<string, string>> = {},
  ) {
    super(message)
    this.name = 'S3Error'
  }
}

export function errorDocument(error: S3Error, resource: string, requestId: string): string {
  return xmlDocument(
    element('Error', [
      element('Code', error.code),
      element('Message', error.message),
      ...Object.entries(error.details).map(([name, value]) => element(name, value)),
      element('Resource', resource),
      element('RequestId', requestId),
    ]),
  )
}

export const noSuchBucket = (name: string) =>
  new S3Error('NoSuchBucket', 404, 'The specified bucket does not exist', { BucketName: name })

export const noSuchKey = (key: string) =>
  new S3Error('NoSuchKey', 404, 'The specified key does not exist.', { Key: key })

export const accessDenied = (message = 'Access Denied', details: Readonly<Record<string, string>> = {}) =>
  new S3Error('AccessDenied', 403, message, details)

export const invalidArgument = (message: string, name?: string, value?: string) =>
  new S3Error('InvalidArgument', 400, message, name ? { ArgumentName: name, ArgumentValue: value ?? '' } : {})

export const invalidRequest = (message: string) => new S3Error('InvalidRequest', 400, message)

export const malformedXml = () =>
  new S3Error(
    'MalformedXML',
    400,
    'The XML you provided was not well-formed or did not validate against our published schema',
  )

export const preconditionFailed = (condition: string) =>
  new S3Error('PreconditionFailed', 412, 'At least one of the pre-conditions you specified did not hold', {
    Condition: condition,
  })

export const notImplemented = (what: string) =>
  new S3Error(
    'NotImplemented',
    501,
    `A header or query you provided implies functionality that is not implemented: ${what}`,
  )
