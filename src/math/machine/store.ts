/**
 * Memory for generated code. Many plants share one memory: each memory reserves much address space, and a plant needs
 * little. Regions are never given back one by one; when a memory is full the next one is begun, and a memory goes when
 * nothing that lives in it is left.
 */
const PAGE = 65_536;
/** Pages of one memory; they cost nothing before they are written to. */
const PAGES = 1024;

export interface Region {
  readonly memory: WebAssembly.Memory;
  /** Address of its first byte. */
  readonly base: number;
  /** Numbers from the `from`-th of the region on. */
  view(from: number, count: number): Float64Array<ArrayBuffer>;
}

let current: { memory: WebAssembly.Memory; used: number } | null = null;

/** A region for so many numbers, all zero. */
export function region(numbers: number): Region {
  // Even, so that pairs of numbers are aligned.
  const bytes = 16 * Math.ceil(numbers / 2);
  const pages = Math.max(PAGES, Math.ceil(bytes / PAGE));
  if (current === null || current.used + bytes > current.memory.buffer.byteLength)
    current = { memory: new WebAssembly.Memory({ initial: pages }), used: 0 };
  const { memory, used: base } = current;
  current.used += bytes;
  return {
    memory,
    base,
    view: (from, count) => new Float64Array(memory.buffer as ArrayBuffer, base + 8 * from, count),
  };
}
