/** Lays the scheme out by itself: left to right, from what is charged to what comes of it. */
import dagre from '@dagrejs/dagre';
import type { SchemeContent } from '$lib/schemas/scheme';

export interface DrawnNode {
	id: string;
	kind: 'species' | 'junction' | 'loss';
	species?: string;
	x: number;
	y: number;
	width: number;
	height: number;
}

export interface DrawnEdge {
	id: string;
	stepId: string;
	/** SVG path of the centre line. */
	path: string;
	/** Second, opposite line of a reversible step. */
	back: string | null;
	/** Whether an arrow head stands at the end. */
	head: boolean;
	coefficient: number;
	/** Where the words of the step stand; null on the branches after a junction. */
	label: { x: number; y: number; backY: number } | null;
}

export interface DrawnScheme {
	nodes: DrawnNode[];
	edges: DrawnEdge[];
	/** Left, top, width, height of everything, bends and labels included. */
	box: [number, number, number, number];
}

export const NODE = { width: 88, height: 50 };
const LABEL = { width: 104, height: 34 };
const HALF_GAP = 5;

interface Point {
	x: number;
	y: number;
}

/** A smooth line through the points: straight ends, rounded bends. */
function smooth(points: Point[]): string {
	const f = (n: number) => Math.round(n * 10) / 10;
	const [first, ...rest] = points;
	let d = `M${f(first.x)} ${f(first.y)}`;
	for (let i = 0; i < rest.length - 1; i++) {
		const a = rest[i];
		const b = rest[i + 1];
		const end = i === rest.length - 2 ? b : { x: (a.x + b.x) / 2, y: (a.y + b.y) / 2 };
		d += `Q${f(a.x)} ${f(a.y)} ${f(end.x)} ${f(end.y)}`;
	}
	if (rest.length === 1) d += `L${f(rest[0].x)} ${f(rest[0].y)}`;
	return d;
}

/** The line moved sideways, for the two directions of a reversible step. */
function aside(points: Point[], by: number): Point[] {
	return points.map((p, i) => {
		const a = points[Math.max(0, i - 1)];
		const b = points[Math.min(points.length - 1, i + 1)];
		const length = Math.hypot(b.x - a.x, b.y - a.y) || 1;
		return { x: p.x + ((b.y - a.y) / length) * by, y: p.y - ((b.x - a.x) / length) * by };
	});
}

const nodeOf = (id: string) => `species:${id}`;

interface Line {
	id: string;
	stepId: string;
	from: string;
	to: string;
	head: boolean;
	labelled: boolean;
	reversible: boolean;
	coefficient: number;
}

/** The lines of the drawing and the helper nodes that they need. */
function linesOf(content: SchemeContent): {
	lines: Line[];
	helpers: { id: string; kind: 'junction' | 'loss' }[];
} {
	const known = new Set(content.species.map((s) => s.id));
	const lines: Line[] = [];
	const helpers: { id: string; kind: 'junction' | 'loss' }[] = [];
	for (const step of content.steps) {
		const products = step.products.filter((p) => known.has(p.species));
		if (!known.has(step.reactant)) continue;
		const base = { stepId: step.id, from: nodeOf(step.reactant), coefficient: 1, reversible: false };
		if (products.length === 0) {
			if (!step.loss) continue;
			const id = `loss:${step.id}`;
			helpers.push({ id, kind: 'loss' });
			lines.push({ ...base, id: step.id, to: id, head: true, labelled: true });
		} else if (products.length === 1) {
			const [p] = products;
			const reversible = step.reverse !== null;
			const to = nodeOf(p.species);
			lines.push({
				...base,
				id: step.id,
				to,
				head: true,
				labelled: true,
				reversible,
				coefficient: p.coefficient
			});
		} else {
			const id = `junction:${step.id}`;
			helpers.push({ id, kind: 'junction' });
			lines.push({ ...base, id: step.id, to: id, head: false, labelled: true });
			for (const p of products)
				lines.push({
					...base,
					id: `${step.id}>${p.species}`,
					from: id,
					to: nodeOf(p.species),
					head: true,
					labelled: false,
					coefficient: p.coefficient
				});
		}
	}
	return { lines, helpers };
}

export function layoutScheme(content: SchemeContent): DrawnScheme {
	const { lines, helpers } = linesOf(content);
	const used = new Set(lines.flatMap((l) => [l.from, l.to]));
	const species = content.species.filter((s) => used.has(nodeOf(s.id)));
	if (species.length === 0) return { nodes: [], edges: [], box: [0, 0, 1, 1] };

	const graph = new dagre.graphlib.Graph({ multigraph: true });
	graph.setGraph({ rankdir: 'LR', nodesep: 34, ranksep: 46, edgesep: 26, marginx: 4, marginy: 4 });
	graph.setDefaultEdgeLabel(() => ({}));
	for (const s of species) graph.setNode(nodeOf(s.id), { ...NODE });
	for (const h of helpers)
		graph.setNode(h.id, h.kind === 'loss' ? { width: 74, height: 34 } : { width: 8, height: 8 });
	for (const line of lines)
		graph.setEdge(
			line.from,
			line.to,
			line.labelled
				? { ...LABEL, height: line.reversible ? 58 : LABEL.height, labelpos: 'c', minlen: 1 }
				: { width: 4, height: 4, labelpos: 'c', minlen: 1 },
			line.id
		);
	dagre.layout(graph);

	const nodes = graph.nodes().map((id): DrawnNode => {
		const { x, y, width, height } = graph.node(id) as Point & { width: number; height: number };
		const kind = id.startsWith('species:') ? 'species' : id.startsWith('loss:') ? 'loss' : 'junction';
		return { id, kind, species: kind === 'species' ? id.slice(8) : undefined, x, y, width, height };
	});
	const edges = lines.map((line): DrawnEdge => {
		const laid = graph.edge({ v: line.from, w: line.to, name: line.id }) as {
			points: Point[];
			x: number;
			y: number;
		};
		const { points } = laid;
		return {
			id: line.id,
			stepId: line.stepId,
			path: smooth(line.reversible ? aside(points, HALF_GAP) : points),
			back: line.reversible ? smooth(aside(points, -HALF_GAP).reverse()) : null,
			head: line.head,
			coefficient: line.coefficient,
			label: line.labelled ? { x: laid.x, y: laid.y - (line.reversible ? 15 : 10), backY: laid.y + 23 } : null
		};
	});
	return { nodes, edges, box: boxOf(nodes, edges, graph, lines) };
}

function boxOf(
	nodes: DrawnNode[],
	edges: DrawnEdge[],
	graph: InstanceType<typeof dagre.graphlib.Graph>,
	lines: Line[]
): [number, number, number, number] {
	const xs: number[] = [];
	const ys: number[] = [];
	for (const n of nodes) {
		xs.push(n.x - n.width / 2, n.x + n.width / 2);
		ys.push(n.y - n.height / 2, n.y + n.height / 2);
	}
	for (const line of lines) {
		const { points } = graph.edge({ v: line.from, w: line.to, name: line.id }) as { points: Point[] };
		for (const p of points) {
			xs.push(p.x);
			ys.push(p.y - HALF_GAP, p.y + HALF_GAP);
		}
	}
	for (const e of edges)
		if (e.label) {
			xs.push(e.label.x - LABEL.width / 2, e.label.x + LABEL.width / 2);
			ys.push(e.label.y - 14, e.back ? e.label.backY + 6 : e.label.y + 4);
		}
	const pad = 6;
	const left = Math.min(...xs) - pad;
	const top = Math.min(...ys) - pad;
	return [left, top, Math.max(...xs) + pad - left, Math.max(...ys) + pad - top];
}
