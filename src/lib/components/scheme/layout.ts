/** Lays the scheme out by itself: left to right, from what is charged to what comes of it. */
import dagre from '@dagrejs/dagre';
import type { SchemeContent } from '$lib/schemas/scheme';

export interface Point {
	x: number;
	y: number;
}

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
	/** Where the line ends; a coefficient stands before it. */
	end: Point;
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

/** A line through the points that lies flat at each of them, so that words can stand on it. */
function smooth(points: Point[]): string {
	const f = (n: number) => Math.round(n * 10) / 10;
	let d = `M${f(points[0].x)} ${f(points[0].y)}`;
	for (let i = 1; i < points.length; i++) {
		const a = points[i - 1];
		const b = points[i];
		const half = (b.x - a.x) / 2;
		if (Math.abs(a.y - b.y) < 0.5) d += `L${f(b.x)} ${f(b.y)}`;
		else d += `C${f(a.x + half)} ${f(a.y)} ${f(b.x - half)} ${f(b.y)} ${f(b.x)} ${f(b.y)}`;
	}
	return d;
}

const lowered = (points: Point[], by: number): Point[] => points.map((p) => ({ x: p.x, y: p.y + by }));

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
	graph.setGraph({ rankdir: 'LR', nodesep: 34, ranksep: 60, edgesep: 26, marginx: 4, marginy: 4 });
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
	const routes = routesOf(graph, lines, new Map(nodes.map((n) => [n.id, n])));
	const edges = lines.map((line): DrawnEdge => {
		const points = routes.get(line.id)!;
		const laid = graph.edge({ v: line.from, w: line.to, name: line.id }) as Point;
		const end = points[points.length - 1];
		return {
			id: line.id,
			stepId: line.stepId,
			path: smooth(line.reversible ? lowered(points, -HALF_GAP) : points),
			back: line.reversible ? smooth(lowered(points, HALF_GAP).reverse()) : null,
			head: line.head,
			coefficient: line.coefficient,
			end: { x: end.x, y: end.y },
			label: line.labelled ? { x: laid.x, y: laid.y - (line.reversible ? 13 : 9), backY: laid.y + 22 } : null
		};
	});
	return { nodes, edges, box: boxOf(nodes, edges, routes) };
}

type Graph = InstanceType<typeof dagre.graphlib.Graph>;

/** Where each line leaves and enters: the side of the species that faces the other, apart from its neighbours. */
function portsOf(graph: Graph, lines: Line[], nodes: Map<string, DrawnNode>): Map<string, Point> {
	const sides = new Map<string, { line: Line; end: 'from' | 'to'; y: number }[]>();
	for (const line of lines)
		for (const end of ['from', 'to'] as const) {
			const right = runsRight(line, nodes) === (end === 'from');
			const key = `${line[end]}|${right ? 'right' : 'left'}`;
			const { y } = graph.edge({ v: line.from, w: line.to, name: line.id }) as Point;
			sides.set(key, [...(sides.get(key) ?? []), { line, end, y }]);
		}
	const ports = new Map<string, Point>();
	for (const [key, list] of sides) {
		const [id, side] = key.split('|');
		const node = nodes.get(id)!;
		const gap = node.kind === 'species' ? Math.min(16, (node.height - 14) / Math.max(1, list.length)) : 0;
		list
			.sort((a, b) => a.y - b.y)
			.forEach(({ line, end }, i) =>
				ports.set(`${line.id}|${end}`, {
					x: node.x + (side === 'right' ? node.width / 2 : -node.width / 2),
					y: node.y + (i - (list.length - 1) / 2) * gap
				})
			);
	}
	return ports;
}

const runsRight = (line: Line, nodes: Map<string, DrawnNode>): boolean =>
	nodes.get(line.from)!.x <= nodes.get(line.to)!.x;

function routesOf(graph: Graph, lines: Line[], nodes: Map<string, DrawnNode>): Map<string, Point[]> {
	const ports = portsOf(graph, lines, nodes);
	return new Map(
		lines.map((line) => {
			const laid = graph.edge({ v: line.from, w: line.to, name: line.id }) as Point & { points: Point[] };
			const flat = (line.labelled ? LABEL.width / 2 - 4 : 0) * (runsRight(line, nodes) ? 1 : -1);
			const inner = laid.points.slice(1, -1);
			const off = (p: Point) => Math.abs(p.x - laid.x);
			const middle = inner.reduce((best, p, i) => (off(p) < off(inner[best]) ? i : best), 0);
			const bends = inner.flatMap((p, i) =>
				i === middle && flat
					? [
							{ x: laid.x - flat, y: laid.y },
							{ x: laid.x + flat, y: laid.y }
						]
					: [p]
			);
			return [line.id, [ports.get(`${line.id}|from`)!, ...bends, ports.get(`${line.id}|to`)!]];
		})
	);
}

function boxOf(
	nodes: DrawnNode[],
	edges: DrawnEdge[],
	routes: Map<string, Point[]>
): [number, number, number, number] {
	const xs: number[] = [];
	const ys: number[] = [];
	for (const n of nodes) {
		xs.push(n.x - n.width / 2, n.x + n.width / 2);
		ys.push(n.y - n.height / 2, n.y + n.height / 2);
	}
	for (const points of routes.values())
		for (const p of points) {
			xs.push(p.x);
			ys.push(p.y - HALF_GAP, p.y + HALF_GAP);
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
