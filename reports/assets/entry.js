// The parts of ECharts a report draws with; build.sh makes echarts.js.gz of it.
import * as echarts from "echarts/core";
import { BarChart, CustomChart, LineChart, ScatterChart } from "echarts/charts";
import { GridComponent, LegendComponent, TitleComponent } from "echarts/components";
import { CanvasRenderer, SVGRenderer } from "echarts/renderers";
echarts.use([BarChart, CustomChart, LineChart, ScatterChart, GridComponent, LegendComponent, TitleComponent, CanvasRenderer, SVGRenderer]);
export { graphic, init, version } from "echarts/core";
