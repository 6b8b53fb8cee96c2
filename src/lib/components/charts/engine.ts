import {
	Chart,
	Filler,
	LinearScale,
	LineElement,
	LogarithmicScale,
	PointElement,
	ScatterController
} from 'chart.js';

Chart.register(ScatterController, LineElement, PointElement, LinearScale, LogarithmicScale, Filler);

export { Chart };
