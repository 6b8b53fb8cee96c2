/** How a running fit is stopped from outside: a question asked often, answered by an exception. */
export class FitCancelled extends Error {
	constructor() {
		super('The fit was cancelled.');
		this.name = 'FitCancelled';
	}
}

/** Called again and again while a model is evaluated; throws FitCancelled to stop. */
export type Watch = () => void;

/** A watch over a question; null where nobody asks. */
export const watchOver = (cancelled: (() => boolean) | undefined): Watch | null =>
	cancelled
		? () => {
				if (cancelled()) throw new FitCancelled();
			}
		: null;
