declare module '*?nodeworker' {
	const source: string;
	export default source;
}
