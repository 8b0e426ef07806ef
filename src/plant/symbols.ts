import type { Network } from '../scenario/network.ts';
import type { Scenario } from '../scenario/scenario.ts';
import { isJust, type Terms, terms } from './algebra.ts';
import { Flows } from './flows.ts';

/** Flows by name: of which feeds, pumps, branches and draws a stream is made up. */
const symbolicFlows = (s: Scenario, net: Network): Flows<Terms> =>
  new Flows<Terms>(s, net, {
    ...terms,
    origin: (m) => new Map([[`${m.kind} ${m.index}`, 1]]),
    take: (b, whole) => (whole.size === 0 ? whole : new Map([[`taken ${b.name}`, 1]])),
    rest: (whole, takes) => terms.sub(whole, terms.add(...takes)),
  });

/** Tells whether the flow of a stream is what a tank's pump sets, whatever is split and blended on its way. */
export function setByPump(s: Scenario, net: Network): (stream: string, tank: number) => boolean {
  const flows = symbolicFlows(s, net);
  return (stream, tank) => isJust(flows.stream(stream).flow, `tank ${tank}`);
}
