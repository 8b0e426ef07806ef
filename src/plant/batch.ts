import type { Batch, Phase } from '../scenario/scenario.ts';
import type { Book, Part } from './book.ts';
import { writeTransfer } from './contact.ts';
import { forBoth, PHASES } from './flow.ts';
import { writeRangeGuards, writeSpeciesGuards } from './range.ts';
import type { Laws } from './train.ts';
import { VANISHING } from './transfer.ts';

/** m³ of a phase in a batch. */
export const batchVolume = ({ mixer, organicShare }: Batch, phase: Phase): number =>
  mixer.volume * (phase === 'organic' ? organicShare : 1 - organicShare);

/** One stirred vessel without flow: both phases stay, and only the transfer between them moves anything. */
export function writeBatch(book: Book, b: Batch, laws: Laws): void {
  const { name, mixer, content } = b;
  const volume = forBoth((phase) => batchVolume(b, phase));
  const held = forBoth((phase) =>
    book.ledger.parameter(`${name}.mixer.${phase}.volume`, 'm^3', volume[phase]),
  );
  const places = forBoth((phase) => book.amounts(`${name}.mixer`, phase, volume[phase], content[phase]));
  const least = book.number(mixer.volume * VANISHING);
  const continuity = book.number(mixer.continuity === 'organic' ? 1 : 0);
  const design = { mixer: volume, entering: { aqueous: Number.NaN, organic: Number.NaN } };
  writeTransfer(book, name, mixer, laws, design, places, { mixer: held, least, continuity });
  writeRangeGuards(book, b.equilibrium, name, places, held, least);
  writeSpeciesGuards(book, name, places.aqueous, held.aqueous, least);
  for (const phase of PHASES) {
    const perVolume = book.signal(book.perVolumeKernel, held[phase], least);
    const part: Part = { phase, path: `${name}.mixer`, places: places[phase], perVolume };
    for (let k = 0; k < book.components(phase); k++)
      book.show(`${name} ${phase}`, k, book.contentOf(part, k));
  }
}
