import { tick } from 'svelte';
import { SHADOW_ITEM_MARKER_PROPERTY_NAME, SOURCES, TRIGGERS, type DndEvent } from 'svelte-dnd-action';
import { announce } from '$lib/client/toast.svelte';
import { boardKey, placeOf, placeWords, TRAY, zoneHolding, zonesOf, type Chip, type Zones } from './board';
import * as draft from './draft';
import type { SchemeEditor } from './editor.svelte';

interface Drag {
	chipId: string;
	species: string;
	from: string;
	keyboard: boolean;
	cancelled: boolean;
}

type Moved = CustomEvent<DndEvent<Chip>>;

/** Carries chips between the tray and the steps; the drag library moves them, the draft changes when one is let go. */
export class Board {
	zones = $state.raw<Zones>({});
	drag = $state.raw<Drag | null>(null);
	private key = '';
	root: HTMLElement | null = null;

	constructor(private readonly editor: SchemeEditor) {
		this.follow();
	}

	/** Shows the content again where it has changed, unless a chip is in the air. */
	follow(): void {
		const key = boardKey(this.editor.content);
		if (this.drag || key === this.key) return;
		this.key = key;
		this.zones = zonesOf(this.editor.content);
	}

	consider(zone: string, event: Moved): void {
		const { trigger, id, source } = event.detail.info;
		if (trigger === TRIGGERS.DRAG_STARTED) this.begin(zone, id, source === SOURCES.KEYBOARD);
		if (trigger === TRIGGERS.DRAG_STOPPED) return void this.settle();
		if (zone === TRAY) {
			if (source === SOURCES.POINTER) this.keepTray(event.detail.items, id);
			return;
		}
		this.set(zone, event.detail.items);
	}

	finalize(zone: string, event: Moved): void {
		const { trigger, source } = event.detail.info;
		if (zone === TRAY) {
			if (source === SOURCES.POINTER) this.set(TRAY, [...(this.zones[TRAY] ?? [])]);
			if (source === SOURCES.KEYBOARD && trigger === TRIGGERS.DROPPED_INTO_ANOTHER) this.refillTray();
		} else this.set(zone, event.detail.items);
		if (source === SOURCES.POINTER) return void this.settle();
		if (trigger === TRIGGERS.DROPPED_INTO_ZONE && this.drag)
			announce(`${this.drag.species} over ${placeWords(this.editor.content, zone)}.`);
	}

	/** Arrow keys and Tab carry a chip from place to place, Escape takes it back. Called before the library sees the key. */
	keys(event: KeyboardEvent): void {
		if (!this.drag) return;
		if (event.key === 'Escape') {
			this.drag = { ...this.drag, cancelled: true };
			if (!this.drag.keyboard) window.dispatchEvent(new MouseEvent('mouseup'));
			return;
		}
		if (!this.drag.keyboard) return;
		const tab = event.shiftKey ? -1 : 1;
		const by = { ArrowRight: 1, ArrowDown: 1, ArrowLeft: -1, ArrowUp: -1, Tab: tab }[event.key];
		if (by === undefined) return;
		event.preventDefault();
		event.stopPropagation();
		const open = [...(this.root?.querySelectorAll<HTMLElement>('[data-zone]') ?? [])];
		const holding = zoneHolding(this.zones, this.drag.chipId) ?? this.drag.from;
		const at = open.findIndex((z) => z.dataset.zone === holding);
		for (let i = at + by; i >= 0 && i < open.length; i += by)
			if (open[i].dataset.zone !== TRAY) return open[i].focus();
	}

	private begin(zone: string, chipId: string, keyboard: boolean): void {
		const chip = this.zones[zone]?.find((c) => c.id === chipId);
		if (!chip) return;
		this.drag = { chipId, species: chip.species, from: zone, keyboard, cancelled: false };
		if (keyboard)
			announce(
				`${chip.species} picked up from ${placeWords(this.editor.content, zone)}. ` +
					'Arrow keys or Tab carry it to a place in a step, Space drops it, Escape puts it back.'
			);
	}

	private set(zone: string, chips: Chip[]): void {
		this.zones = { ...this.zones, [zone]: chips };
	}

	/** While a chip flies out of the tray a copy of it stays there. */
	private keepTray(items: Chip[], id: string): void {
		if (!this.drag || this.drag.from !== TRAY) return;
		if (this.zones[TRAY].some((c) => c.id === `copy:${id}`)) {
			// The library watches for a new list, not for a new content.
			this.set(TRAY, [...this.zones[TRAY]]);
			return;
		}
		const order = this.editor.content.species.map((s) => s.id);
		const rest = items.filter(
			(c) => !(c as Chip & Record<string, unknown>)[SHADOW_ITEM_MARKER_PROPERTY_NAME] && c.id !== id
		);
		const copy: Chip = { id: `copy:${id}`, species: this.drag.species, coefficient: 1 };
		this.set(
			TRAY,
			[...rest, copy].sort((a, b) => order.indexOf(a.species) - order.indexOf(b.species))
		);
	}

	private refillTray(): void {
		const fresh = zonesOf(this.editor.content)[TRAY];
		this.set(TRAY, fresh);
	}

	/** After the library has said its last word of this drag: the draft changes, the chips are laid out anew. */
	private async settle(): Promise<void> {
		if (!this.drag) return;
		await Promise.resolve();
		const drag = this.drag;
		if (!drag) return;
		const zone = drag.cancelled ? drag.from : (zoneHolding(this.zones, drag.chipId) ?? drag.from);
		this.drag = null;
		this.key = '';
		const to = placeOf(zone);
		if (to && zone !== drag.from) {
			const words = placeWords(this.editor.content, zone);
			this.editor.apply(draft.move(this.editor.content, drag.species, placeOf(drag.from), to));
			announce(`${drag.species} is now the ${words}.`);
		} else announce(`${drag.species} put back.`);
		this.follow();
		await tick();
		if (drag.keyboard) this.refocus(drag.species, to);
	}

	private refocus(species: string, to: draft.Place | null): void {
		const steps = this.editor.content.steps;
		const stepId = to ? (to.stepId ?? steps.at(-1)?.id) : null;
		const zone = to && stepId ? `${stepId}|${to.side}` : TRAY;
		this.root
			?.querySelector<HTMLElement>(
				`[data-zone="${CSS.escape(zone)}"] [data-species="${CSS.escape(species)}"]`
			)
			?.focus();
	}
}
