#!/usr/bin/env node
import { exits } from './exit.ts';
import { main } from './program.ts';

// Who reads may stop reading (`| head`): what remains to be written to files still is.
for (const stream of [process.stdout, process.stderr])
  stream.on('error', (e: NodeJS.ErrnoException) => {
    if (e.code !== 'EPIPE') throw e;
  });

try {
  process.exitCode = await main(process.argv);
} catch (e) {
  const text = e instanceof Error ? (e.stack ?? e.message) : String(e);
  process.stderr.write(
    `This is an error of the program, not of your scenario. Please report it with the scenario and these lines:\n${text}\n`,
  );
  process.exitCode = exits.bug;
}
