/**
 * Which modes must be treated together.
 *
 * Two modes whose rates (nearly) agree *and* of which one feeds the other make a denominator λ_i − λ_j that destroys digits;
 * they form a group and get a polynomial in t instead. Equal numbers in separate branches do not: they stay simple.
 *
 *     group with centre μ:  e^{μt} Σ_m a_m t^m,  degree = members − 1 + extra,
 *     extra terms carry the differences δ_i = λ_i − μ: (δ t)^m / m! until it is below 1e-17 for t ≤ 45/|μ|
 *
 * Source: A. McCurdy, K. C. Ng and B. N. Parlett, Math. Comp. 43 (1984) 501 (confluent divided differences of exp).
 */
import type { ModeSpace } from './mode-space';

export interface ModeGroup {
	re: number;
	im: number;
	members: number[];
	/** Highest power of t. */
	degree: number;
}

/** Relative difference of rates up to which coupled modes are grouped. */
const NEAR = 2e-3;
/** e^{−45} is far below rounding. */
const REACH = 45;
const MOST_EXTRA = 26;

export function modeGroups(space: ModeSpace): { groups: ModeGroup[]; groupOf: Int32Array } {
	const { n } = space;
	const feeds = feedMatrix(space);
	const leader = new Int32Array(n);
	for (let i = 0; i < n; i++) leader[i] = i;
	const find = (i: number): number => (leader[i] === i ? i : (leader[i] = find(leader[i])));
	for (let i = 0; i < n; i++)
		for (let j = 0; j < i; j++) if (feeds[i * n + j] && near(space, i, j)) leader[find(i)] = find(j);
	const memberLists: number[][] = [];
	const groupOf = new Int32Array(n).fill(-1);
	for (let i = 0; i < n; i++) {
		const root = find(i);
		if (groupOf[root] < 0) groupOf[root] = memberLists.push([]) - 1;
		groupOf[i] = groupOf[root];
		memberLists[groupOf[i]].push(i);
	}
	return { groups: memberLists.map((members) => groupFrom(space, members)), groupOf };
}

function near({ lambda }: ModeSpace, i: number, j: number): boolean {
	const gapRe = Math.abs(lambda.re[i] - lambda.re[j]);
	const gapIm = lambda.im[i] - lambda.im[j];
	const gap = gapIm === 0 ? gapRe : Math.hypot(gapRe, gapIm);
	return gap === 0 || gap <= NEAR * Math.max(Math.abs(lambda.re[i]), Math.abs(lambda.re[j]));
}

/** feeds[i·n + j]: mode i depends on mode j, directly or through others. */
function feedMatrix({ n, t }: ModeSpace): Uint8Array {
	const feeds = new Uint8Array(n * n);
	for (let i = 0; i < n; i++)
		for (let j = 0; j < i; j++) {
			if (t.re[i * n + j] === 0 && t.im[i * n + j] === 0) continue;
			feeds[i * n + j] = 1;
			for (let k = 0; k < j; k++) if (feeds[j * n + k]) feeds[i * n + k] = 1;
		}
	return feeds;
}

function groupFrom({ lambda }: ModeSpace, members: number[]): ModeGroup {
	const first = members[0];
	if (members.length === 1) return { re: lambda.re[first], im: lambda.im[first], members, degree: 0 };
	let re = 0;
	let im = 0;
	for (const k of members) {
		re += (lambda.re[k] - lambda.re[first]) / members.length;
		im += (lambda.im[k] - lambda.im[first]) / members.length;
	}
	re += lambda.re[first];
	im += lambda.im[first];
	let spread = 0;
	for (const k of members) spread = Math.max(spread, Math.hypot(lambda.re[k] - re, lambda.im[k] - im));
	if (Math.abs(im) <= spread) im = 0;
	return { re, im, members, degree: members.length - 1 + extraTerms(spread / Math.abs(re)) };
}

function extraTerms(spread: number): number {
	if (!(spread > 0)) return 0;
	let term = 1;
	for (let m = 1; m < MOST_EXTRA; m++) {
		term *= (REACH * spread) / m;
		if (term < 1e-17) return m;
	}
	return MOST_EXTRA;
}
