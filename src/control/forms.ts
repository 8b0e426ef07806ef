import type { Settings } from './rules.ts';

/** The same settings in the three forms in use; s and output per unit of measurement. */
export interface Forms {
  readonly standard: Settings;
  readonly parallel: {
    readonly proportional: number;
    readonly integral: number;
    readonly derivative: number;
  };
  /** Null where there is no series form: Ti < 4·Td. */
  readonly series: Settings | null;
  readonly repeatsPerMinute: number;
  /** Per cent of the output's span per per cent of the measurement's; null without both ranges. */
  readonly percentGain: number | null;
  readonly proportionalBand: number | null;
}

/**
 * Parallel: Kp = Kc, Ki = Kc/Ti, Kd = Kc·Td. Series, with D = √(1 − 4Td/Ti): Kc(1 + D)/2, Ti(1 + D)/2, Ti(1 − D)/2, from
 * Kc' = Kc·c, Ti = τI·c, Td = τD/c, c = 1 + τD/τI.
 */
export function forms(s: Settings, spans: { measurement: number; output: number } | null): Forms {
  const square = 1 - (4 * s.derivativeTime) / s.integralTime;
  const D = Math.sqrt(Math.max(0, square));
  const percent = spans && (s.gain * spans.measurement) / spans.output;
  return {
    standard: s,
    parallel: {
      proportional: s.gain,
      integral: s.gain / s.integralTime,
      derivative: s.gain * s.derivativeTime,
    },
    series:
      square < 0
        ? null
        : {
            gain: (s.gain * (1 + D)) / 2,
            integralTime: (s.integralTime * (1 + D)) / 2,
            derivativeTime: (s.integralTime * (1 - D)) / 2,
          },
    repeatsPerMinute: 60 / s.integralTime,
    percentGain: percent,
    proportionalBand: percent === null ? null : 100 / percent,
  };
}
