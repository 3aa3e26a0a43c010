/**
 * Remembers what never changes again (a sealed list, a settled transcript), so that a page that many people open at once
 * is worked out once. The least lately used go first.
 */
export class Lasting<T> {
  private readonly values = new Map<string, Promise<T>>()
  constructor(private readonly limit: number) {}

  get(key: string, make: () => Promise<T>): Promise<T> {
    const known = this.values.get(key)
    if (known) {
      this.values.delete(key)
      this.values.set(key, known)
      return known
    }
    const made = make()
    this.values.set(key, made)
    made.catch(() => this.values.delete(key))
    const oldest = this.values.keys().next()
    if (this.values.size > this.limit && !oldest.done) this.values.delete(oldest.value)
    return made
  }
}
