/**
 * How far a fit is, as one share of the whole that never goes back.
 *
 * The work of a stage is only known in hindsight, so each is given a weight in evaluations of the model; when a stage begins, what is
 * left of the whole is shared out among it and the stages after it:
 *     fraction = f₀ + (1 − f₀) · w/(w + w_later) · done/total
 * with f₀ the fraction then. A stage that turns out dearer than foretold goes more slowly; none makes the bar jump or return.
 */
export interface FitProgress {
	/** What is being done now, in words. */
	stage: string;
	done: number;
	total: number;
	/** Share of the whole work that is done, 0 to 1; never goes back. */
	fraction?: number;
	/** Best weighted sum of squares so far. */
	best?: number;
}

/** Evaluations that a descent from one start, the refinement of the minima, and the profile of one parameter usually take. */
export const USUAL_WORK = { start: 15, refinement: 40, profile: 60, report: 5 };

export class ProgressMeter {
	private stage = '';
	private from = 0;
	private share = 0;
	private fraction = 0;

	constructor(private readonly tell: ((progress: FitProgress) => void) | undefined) {}

	/** @param weight work of the stage that begins, `later` that of all after it */
	begin(stage: string, weight: number, later: number): void {
		this.stage = stage;
		this.from = this.fraction;
		this.share = ((1 - this.from) * weight) / (weight + later || 1);
	}

	step(done: number, total: number, best?: number): void {
		this.fraction = Math.max(
			this.fraction,
			this.from + this.share * Math.min(1, total > 0 ? done / total : 1)
		);
		this.tell?.({
			stage: this.stage,
			done,
			total,
			fraction: this.fraction,
			...(best !== undefined && Number.isFinite(best) ? { best } : {})
		});
	}
}

/** Progress of work that has one stage. */
export const oneStage = (stage: string, done: number, total: number): FitProgress => ({
	stage,
	done,
	total,
	fraction: total > 0 ? done / total : 1
});
