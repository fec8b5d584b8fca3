/** How every chart looks: the page's own inks, a figure size that can be read. */
import { buildChartTheme } from '@visx/xychart'

/** @param colours  of the series, in their order. */
export const chartTheme = (...colours: string[]) =>
  buildChartTheme({
    backgroundColor: 'transparent',
    colors: colours,
    gridColor: 'var(--color-rule)',
    gridColorDark: 'var(--color-rule-strong)',
    tickLength: 4,
    svgLabelSmall: { fill: 'var(--color-ink-quiet)', fontSize: 13 },
  })
