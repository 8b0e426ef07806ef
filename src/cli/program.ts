import { Command, CommanderError, InvalidArgumentError, Option } from 'commander';
import { makeConsole } from './console.ts';
import { exits, Known } from './exit.ts';
import { version } from './files.ts';

const integrators = ['rodas5p', 'rodas4', 'odex'];
const TOLERANCE = 1e-6;

/** 1 for a screen, 2 for paper. */
const scale = (): Option =>
  new Option('--scale <number>', 'pictures of 1200 x 700 pixels, or of twice as many')
    .choices(['1', '2'])
    .default('1');

/** Reads the command line, runs the verb, returns the exit code. Verbs load what they need when they are called. */
export async function main(argv: readonly string[]): Promise<number> {
  let code: number = exits.done;
  const program = new Command('upsettle')
    .description(
      'Dynamic simulator of a counter-current mixer-settler cascade: start-up, feed upsets, flow-ratio changes.',
    )
    .version(version(), '-V, --version', 'print the version')
    .exitOverride()
    .showHelpAfterError('upsettle --help lists all commands and options')
    .option('--quiet', 'say nothing but errors')
    .addHelpText(
      'after',
      '\nExamples:\n  upsettle new my-plant.yaml --kind circuit\n  upsettle check my-plant.yaml\n  upsettle run my-plant.yaml\n',
    );
  const console = (): ReturnType<typeof makeConsole> => makeConsole(program.opts().quiet === true);
  const verb = (name: string, what: string, example: string): Command =>
    program
      .command(name)
      .description(what)
      .argument('<file>', 'scenario file (YAML)')
      .option('--quiet', 'say nothing but errors')
      .addHelpText('after', `\nExample:\n  ${example}\n`);
  const quiet = (o: { quiet?: boolean }): ReturnType<typeof makeConsole> =>
    o.quiet ? makeConsole(true) : console();

  program
    .command('new')
    .description('write a commented scenario to begin with')
    .argument('<file>', 'scenario file to write (YAML)')
    .option(
      '--kind <name>',
      'kind of plant: single, circuit, parting, loop, vessels, beaker; asked on a terminal',
    )
    .option('--title <text>', 'its title')
    .option('--solutes <names>', 'what transfers, such as copper, or zinc,iron for two')
    .option('--editor', 'with the line and the schema file by which editors complete and check it')
    .option('--replace', 'overwrite the file if it is there')
    .option('--quiet', 'say nothing but errors')
    .addHelpText(
      'after',
      '\nExample:\n  upsettle new my-plant.yaml --kind circuit --solutes copper --title "Our plant"\n',
    )
    .action(async (file: string, o) => {
      const { makeNew } = await import('./verbs/new.ts');
      code = await makeNew(file, o, quiet(o));
    });
  program
    .command('schema')
    .description('print the JSON Schema of a scenario, for editors')
    .addHelpText('after', '\nExample:\n  upsettle schema > scenario.schema.json\n')
    .action(async () => {
      const { schema } = await import('./verbs/schema.ts');
      code = schema();
    });
  verb(
    'check',
    'check a scenario and print the plant as understood',
    'upsettle check scenarios/saltbush-copper.yaml',
  ).action(async (file: string, o) => {
    const { check } = await import('./verbs/check.ts');
    code = check(file, quiet(o));
  });
  verb(
    'run',
    'run a scenario: series.csv, summary.json and pictures',
    'upsettle run scenarios/ten.yaml --out results --no-pictures',
  )
    .option('--out <dir>', 'folder for the results (default: out/<scenario>/run)')
    .option('--no-pictures', 'write neither PNG pictures nor report.html')
    .addOption(scale())
    .addOption(
      new Option('--integrator <name>', 'method of integration').choices(integrators).default('rodas5p'),
    )
    .addOption(
      new Option('--tolerance <number>', 'relative tolerance')
        .argParser(tolerance)
        .default(TOLERANCE, '1e-6'),
    )
    .option('--save-state <file>', 'keep the state at the end (or at --save-at) in a file')
    .addOption(new Option('--save-at <time>', "when to keep it, such as '12 h'"))
    .action(async (file: string, o) => {
      const { run } = await import('./verbs/run.ts');
      code = await run(file, o, quiet(o));
    });
  verb(
    'steady',
    'find the steady state of the inputs at time zero',
    'upsettle steady scenarios/saltbush-copper.yaml',
  )
    .option('--out <dir>', 'folder for the results (default: out/<scenario>/steady)')
    .option('--no-pictures', 'write neither PNG pictures nor report.html')
    .addOption(scale())
    .action(async (file: string, o) => {
      const { steady } = await import('./verbs/steady.ts');
      code = await steady(file, o, quiet(o));
    });
  verb(
    'commission',
    'start-up: when all comes good, why not sooner, what to do about it',
    'upsettle commission scenarios/saltbush-startup.yaml',
  )
    .option('--out <dir>', 'folder for the results (default: out/<scenario>/commission)')
    .option('--no-pictures', 'write neither PNG pictures nor report.html')
    .addOption(scale())
    .addOption(
      new Option('--ensemble <runs>', 'start-ups over the uncertain inputs; 0: none')
        .argParser(whole(0, 100_000))
        .default(200),
    )
    .addOption(new Option('--seed <number>', 'of the ensemble').argParser(whole(0, 2_000_000_000)).default(1))
    .addOption(
      new Option('--workers <number>', 'threads for the ensemble (default: all cores)').argParser(
        whole(1, 256),
      ),
    )
    .action(async (file: string, o) => {
      const { commission } = await import('./verbs/commission.ts');
      code = await commission(file, o, quiet(o));
    });
  verb(
    'rehearse',
    'upsets before they happen: what breaks, which answer helps, how late it may come',
    'upsettle rehearse scenarios/saltbush-rehearsal.yaml --map "more organic"',
  )
    .option('--out <dir>', 'folder for the results (default: out/<scenario>/rehearse)')
    .option('--no-pictures', 'write neither PNG pictures nor report.html')
    .addOption(scale())
    .option('--step', 'drive the plant through the upset yourself, and be scored')
    .addOption(
      new Option('--speed <number>', 'seconds of the plant in one of yours, with --step')
        .argParser(whole(1, 100_000))
        .default(120),
    )
    .option('--map <answer>', 'map start × size of an answer, by its name')
    .addOption(
      new Option('--map-of <what>', 'what the map shows').choices(['worst', 'time']).default('worst'),
    )
    .addOption(
      new Option('--grid <columns>', 'starts × sizes of the map, such as 20x16')
        .argParser(grid)
        .default([20, 16], '20x16'),
    )
    .addOption(
      new Option('--workers <number>', 'threads for the map (default: all cores)').argParser(whole(1, 256)),
    )
    .action(async (file: string, o) => {
      if (o.step) {
        const { step } = await import('./verbs/step.ts');
        code = await step(file, o, quiet(o));
        return;
      }
      const { rehearse } = await import('./verbs/rehearse.ts');
      code = await rehearse(file, o, quiet(o));
    });
  verb(
    'tune',
    'settings for a control loop, with margins, proved on the plant',
    'upsettle tune scenarios/saltbush-loop.yaml',
  )
    .option('--out <dir>', 'folder for the results (default: out/<scenario>/tune)')
    .option('--no-pictures', 'write neither PNG pictures nor report.html')
    .addOption(scale())
    .option('--loop <name>', 'the loop to tune (default: the first one)')
    .addOption(
      new Option('--ms <number>', 'largest sensitivity of the own optimum')
        .argParser(within(1.1, 3))
        .default(1.6),
    )
    .addOption(
      new Option('--range <number>', 'half the width of the operating map, as a share')
        .argParser(within(0.01, 0.9))
        .default(0.3),
    )
    .option('--test <file>', 'a step test on the real plant (CSV: time, output, measurement)')
    .action(async (file: string, o) => {
      const { tune } = await import('./verbs/tune.ts');
      code = await tune(file, o, quiet(o));
    });
  if (argv.length <= 2) {
    process.stdout.write(greeting());
    return exits.done;
  }
  try {
    await program.parseAsync(argv as string[]);
    return code;
  } catch (e) {
    if (e instanceof CommanderError) return e.exitCode === 0 ? exits.done : exits.usage;
    if (e instanceof Known) {
      process.stderr.write(`${e.message}\n`);
      return e.code;
    }
    throw e;
  }
}

function tolerance(text: string): number {
  const value = Number(text);
  if (value >= 1e-12 && value <= 1e-2) return value;
  throw new InvalidArgumentError('Expected a number from 1e-12 to 1e-2.');
}

const within =
  (least: number, most: number) =>
  (text: string): number => {
    const value = Number(text);
    if (text.trim() !== '' && value >= least && value <= most) return value;
    throw new InvalidArgumentError(`Expected a number from ${least} to ${most}.`);
  };

const whole =
  (least: number, most: number) =>
  (text: string): number => {
    if (/^\d+$/.test(text) && Number(text) >= least && Number(text) <= most) return Number(text);
    throw new InvalidArgumentError(`Expected a whole number from ${least} to ${most}.`);
  };

function grid(text: string): [number, number] {
  const [, columns, rows] = /^(\d+)\s*[x×]\s*(\d+)$/.exec(text) ?? [];
  const [a, b] = [Number(columns), Number(rows)];
  if (a >= 2 && a <= 200 && b >= 2 && b <= 200) return [a, b];
  throw new InvalidArgumentError('Expected two whole numbers from 2 to 200, such as 20x16.');
}

const greeting =
  (): string => `Upsettle ${version()}: what happens between the steady states of a mixer-settler cascade.
It runs a plant from one file through start-up and upsets, and tunes its control loops.

Begin with:
  upsettle new my-plant.yaml      a commented file for a kind of plant of your choice
  upsettle check my-plant.yaml    the plant as understood, and what is unusual about it
  upsettle run my-plant.yaml      start-up and upsets, with pictures in out/my-plant/run

Then: steady, commission, rehearse, tune. upsettle --help lists all, upsettle run --help its options.
`;
