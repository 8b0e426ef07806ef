import type { Problem } from './refusal.ts';
import type { Scenario, Train } from './scenario.ts';

/** Records and vessels beyond which a run would fill the memory, whatever the machine. */
const MOST_RECORDS = 2e6;
const MOST_PLACES = 400_000;
const MOST_VALUES = 4e8;

/** Complains about a plant or a record that no memory holds. */
export function checkSize(s: Scenario, problems: Problem[]): void {
  const records = s.horizon / s.recordEvery;
  const perStage = (t: Train): number => t.stages.reduce((n, q) => n + 1 + q.settler.parts, 0);
  const places = s.trains.reduce((n, t) => n + perStage(t) * (2 * s.solutes.length + s.species.length), 0);
  const complain = (key: string, message: string): number => problems.push({ path: [key], message });
  if (records > MOST_RECORDS)
    complain(
      'record_every',
      `${records.toPrecision(3)} records are too many (at most ${MOST_RECORDS}); record less often or shorten the horizon`,
    );
  else if (places > MOST_PLACES)
    complain(
      'trains',
      `${places} concentrations are too many (at most ${MOST_PLACES}); take fewer stages or tanks_in_series`,
    );
  else if (records * places > MOST_VALUES)
    complain(
      'record_every',
      `${records.toPrecision(3)} records of ${places} concentrations are too many values (at most ${MOST_VALUES}); record less often`,
    );
}
