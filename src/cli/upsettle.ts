#!/usr/bin/env node
import { exits } from './exit.ts';
import { main } from './program.ts';

try {
  process.exitCode = await main(process.argv);
} catch (e) {
  const text = e instanceof Error ? (e.stack ?? e.message) : String(e);
  process.stderr.write(
    `This is an error of the program, not of your scenario. Please report it with the scenario and these lines:\n${text}\n`,
  );
  process.exitCode = exits.bug;
}
