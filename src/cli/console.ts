/** What a verb may say: to the screen unless quiet; progress only on a terminal. */
export interface Console {
  say(lines: readonly string[]): void;
  progress(share: number, what: string): void;
  clear(): void;
}

/** ms between two updates of the progress line. */
const UPDATE = 150;

export function makeConsole(quiet: boolean): Console {
  let last = performance.now();
  let drawn = false;
  const live = !quiet && process.stderr.isTTY === true;
  return {
    say(lines) {
      if (!quiet) process.stdout.write(`${lines.join('\n')}\n`);
    },
    progress(share, what) {
      const now = performance.now();
      if (!live || now - last < UPDATE) return;
      last = now;
      drawn = true;
      process.stderr.write(`\r${what} ${String(Math.floor(share * 100)).padStart(3)} %\x1b[K`);
    },
    clear() {
      if (drawn) process.stderr.write('\r\x1b[K');
      drawn = false;
    },
  };
}
