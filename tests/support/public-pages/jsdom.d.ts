declare module 'jsdom' {
  /** The part of jsdom that the tests of rendered pages use; the package brings no types. */
  export class JSDOM {
    constructor(html: string)
    readonly window: Window & typeof globalThis
  }
}
