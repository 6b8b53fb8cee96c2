/* Runs before the first paint: day or night shift and glove mode as this person chose on this device. */
(function () {
	var root = document.documentElement;
	var night = window.matchMedia('(prefers-color-scheme: dark)');
	function read(name) {
		try {
			return window.localStorage.getItem('ratewright.' + name);
		} catch {
			return null;
		}
	}
	function apply() {
		var chosen = read('shift');
		var fixed = chosen === 'day' || chosen === 'night';
		root.dataset.shift = fixed ? chosen : night.matches ? 'night' : 'day';
		root.dataset.shiftChoice = fixed ? chosen : 'system';
		root.dataset.gloves = read('gloves') === 'on' ? 'on' : 'off';
	}
	apply();
	night.addEventListener('change', function () {
		apply();
		window.dispatchEvent(new CustomEvent('shiftchange'));
	});
})();
