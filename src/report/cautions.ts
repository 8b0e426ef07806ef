/** Shown by every report and by README: this is an aid for people who can be hurt by what they do next. */
export const cautions = `Upsettle is an engineering aid, not a safety system, and replaces neither a hazard study nor licensed practice; local codes and the site's own procedures govern. Solvents and diluents burn and their mist ignites below the flash point of the bulk; static charge builds up in fast organic flow and free fall; acids and extractants injure skin and eyes; agitators and pumps start without warning. Nothing here may be connected to override an interlock. A result holds for the data that were put in: check it against plant samples before acting on it.`;

/** The same in one line, for a screen. */
export const shortCaution =
  'An engineering aid, not a safety system: check against plant samples; local codes and site procedures govern.';
