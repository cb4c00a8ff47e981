/** A cache that forgets what was used longest ago once its contents exceed a number of bytes. */
export class BoundedCache<T> {
  /** In order of last use. */
  private readonly entries = new Map<string, { readonly value: T; readonly bytes: number }>();
  private bytes = 0;

  /** @param limit bytes kept at most; one entry is always kept, however large */
  constructor(private readonly limit: number) {}

  /** The value of a key, made if it is not there. */
  get(key: string, make: () => T): T {
    let entry = this.entries.get(key);
    if (entry) {
      this.entries.delete(key);
    } else {
      const value = make();
      entry = { value, bytes: bytesIn(value) };
      this.bytes += entry.bytes;
    }
    this.entries.set(key, entry);
    for (const [oldest, { bytes }] of this.entries) {
      if (this.bytes <= this.limit || oldest === key) break;
      this.entries.delete(oldest);
      this.bytes -= bytes;
    }
    return entry.value;
  }

  get size(): number {
    return this.entries.size;
  }
}

/** Bytes of the typed arrays anywhere in a value. */
function bytesIn(value: unknown): number {
  if (ArrayBuffer.isView(value)) return value.byteLength;
  if (typeof value !== 'object' || value === null) return 0;
  return Object.values(value).reduce((sum: number, part) => sum + bytesIn(part), 0);
}
