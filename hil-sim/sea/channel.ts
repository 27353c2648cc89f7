/**
 * What the link does to one frame on one ordered pair, on top of the channel's physics: loss in
 * bursts, delay, repetition, garbling. All draws are by the pair and by the count of its frames.
 *
 * Loss is Gilbert's two-state chain (METHODS A7): in the bad state every frame is lost, the mean bad
 * run is `burst`, the long-run share is `loss`. A burst of 1 is independent loss. Where share and run
 * cannot both be had (loss above burst/(burst + 1)), the share is kept and the runs grow.
 */
import { PURPOSE, normalPair, uniform, type Draw } from './draw.ts';
import type { LinkPlan } from './plan.ts';

const FLIPS_MAX = 3;
/** A repeated frame comes again this much later, at least and at most. */
const REPEAT_LEAST_S = 0.5;
const REPEAT_MOST_S = 3.5;

/** What becomes of one frame on one pair. */
export interface LinkFate {
  lost: boolean;
  garbled: boolean;
  delayS: number;
  /** How much later it is heard a second time; negative if it is not. */
  repeatAfterS: number;
}

/** The chains of all pairs; pair = from × fleet size + to. */
export interface LinkState {
  readonly isBad: Uint8Array;
  readonly sent: Uint32Array;
}

export function startLinks(pairs: number): LinkState {
  return { isBad: new Uint8Array(pairs), sent: new Uint32Array(pairs) };
}

/** Whether the pair's chain is bad for its next frame. */
function stepChain(
  links: LinkState,
  pair: number,
  chance: { link: LinkPlan; draw: number; isFirst: boolean },
): boolean {
  const { loss, burst } = chance.link;
  let bad: boolean;
  if (burst <= 1 || loss <= 0 || loss >= 1 || chance.isFirst) {
    bad = chance.draw < loss;
  } else {
    const leave = Math.min(1 / burst, (1 - loss) / loss);
    const enter = (loss * leave) / (1 - loss);
    bad = links.isBad[pair] === 1 ? chance.draw >= leave : chance.draw < enter;
  }
  links.isBad[pair] = bad ? 1 : 0;
  return bad;
}

/** Decides the fate of the pair's next frame, written to `fate`; `entity` is the pair's own draw key. */
export function nextFate(
  links: LinkState,
  of: { draw: Draw; link: LinkPlan; pair: number; entity: number; scratch: Float64Array },
  fate: LinkFate,
): void {
  const { draw, link, pair, entity, scratch } = of;
  const count = links.sent[pair]!;
  links.sent[pair] = count + 1;
  const lossDraw = uniform(draw, { entity, purpose: PURPOSE.linkLoss, count });
  fate.lost = stepChain(links, pair, { link, draw: lossDraw, isFirst: count === 0 });
  fate.garbled =
    link.garble > 0 && uniform(draw, { entity, purpose: PURPOSE.linkGarble, count }) < link.garble;
  fate.delayS = link.delayS;
  if (link.jitterS > 0) {
    normalPair(draw, { entity, purpose: PURPOSE.linkJitter, count }, scratch);
    fate.delayS = Math.max(0, link.delayS + link.jitterS * scratch[0]!);
  }
  fate.repeatAfterS = -1;
  if (link.repeat > 0) {
    const of4 = { entity, purpose: PURPOSE.linkRepeat, count };
    if (uniform(draw, of4, 0) < link.repeat) {
      fate.repeatAfterS = REPEAT_LEAST_S + (REPEAT_MOST_S - REPEAT_LEAST_S) * uniform(draw, of4, 1);
    }
  }
}

const HEX = '0123456789abcdef';

/** The frame with one to three different bits flipped, as drawn for the pair's `count`-th frame. */
export function garble(draw: Draw, of: { entity: number; count: number }, hex: string): string {
  const drawOf = { entity: of.entity, purpose: PURPOSE.linkGarble, count: of.count };
  const bits = 4 * hex.length;
  const flips = 1 + Math.floor(uniform(draw, drawOf, 1) * FLIPS_MAX);
  const first = Math.floor(uniform(draw, drawOf, 2) * bits);
  const stride = 1 + Math.floor(uniform(draw, drawOf, 3) * (Math.floor(bits / FLIPS_MAX) - 1));
  const digits = hex.split('');
  for (let flip = 0; flip < flips; flip++) {
    const bit = (first + flip * stride) % bits;
    const digit = HEX.indexOf(digits[bit >> 2]!);
    digits[bit >> 2] = HEX[digit ^ (8 >> (bit & 3))]!;
  }
  return digits.join('');
}
