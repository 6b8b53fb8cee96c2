/** Asks the service a question on a recorded fit; the computation runs in a thread there. */
import type { FitAnswers, FitQuestion } from '$lib/schemas/fit-analysis';

export async function fetchJson<R>(url: string, init?: RequestInit): Promise<R> {
	const response = await fetch(url, init).catch((caught: unknown) => {
		if (caught instanceof DOMException && caught.name === 'AbortError') throw caught;
		throw new Error('The service cannot be reached just now. Try again in a moment.');
	});
	if (response.ok) return (await response.json()) as R;
	const problem = (await response.json().catch(() => null)) as { detail?: string } | null;
	throw new Error(problem?.detail ?? `The service answered ${response.status}.`);
}

export async function askFit<K extends FitQuestion['kind']>(
	fitUrl: string,
	question: Extract<FitQuestion, { kind: K }>,
	signal?: AbortSignal
): Promise<FitAnswers[K]> {
	const { answer } = await fetchJson<{ answer: FitAnswers[K] }>(`${fitUrl}/analysis`, {
		method: 'POST',
		headers: { 'content-type': 'application/json' },
		body: JSON.stringify(question),
		signal
	});
	return answer;
}
