/** Where the top bar leads; the server says which of these the person may open. */
export interface NavRights {
	studies: boolean;
	recipes: boolean;
	records: boolean;
	group: boolean;
	admin: boolean;
}

export interface NavItem {
	href: string;
	label: string;
}

export function navItems(rights: NavRights): NavItem[] {
	const items: [boolean, NavItem][] = [
		[rights.studies, { href: '/studies', label: 'Studies' }],
		[rights.recipes, { href: '/recipes', label: 'Recipes' }],
		[rights.group, { href: '/shared', label: 'Shared with us' }],
		[rights.records, { href: '/records', label: 'Records' }],
		[rights.group, { href: '/group', label: 'Group' }],
		[rights.admin, { href: '/admin', label: 'Admin' }]
	];
	return items.filter(([may]) => may).map(([, item]) => item);
}

export const isHere = (pathname: string, href: string): boolean =>
	pathname === href || pathname.startsWith(`${href}/`);

/** MO for Mara Okafor; letters of the first and last word. */
export function initials(name: string): string {
	const words = name.trim().split(/\s+/).filter(Boolean);
	const letters = words.length > 1 ? [words[0], words[words.length - 1]] : words;
	return letters.map((w) => [...w][0].toUpperCase()).join('') || '?';
}
