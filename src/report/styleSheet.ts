import { cssVariables, DARK, LIGHT } from './palette.ts';

/** Style of pictures and reports: light, dark and print. Nothing is told by colour alone. */
export const STYLE_SHEET = `
:root{color-scheme:light dark;${cssVariables(LIGHT)}}
@media (prefers-color-scheme:dark){:root{${cssVariables(DARK)}}}
@media print{:root{color-scheme:light;${cssVariables(LIGHT)};--paper:#ffffff}}
*{box-sizing:border-box}
body{margin:0;background:var(--paper);color:var(--ink);font:16px/1.5 system-ui,"Segoe UI",Roboto,"Helvetica Neue",Arial,sans-serif}
.sheet{max-width:60rem;margin:0 auto;padding:1.5rem 1.25rem 3rem}
h1{font-size:1.7rem;line-height:1.25;margin:0 0 .4rem;text-wrap:balance}
h2{font-size:1.3rem;line-height:1.3;margin:2.2rem 0 .5rem;border-top:1px solid var(--grid);padding-top:1.2rem}
h3{font-size:1.05rem;line-height:1.35;margin:0 0 .2rem}
p{margin:.35rem 0}
.soft{color:var(--soft)}
.numbers,td.number,th.number{font-variant-numeric:tabular-nums}
.break{overflow-wrap:anywhere}
.badge{display:inline-block;padding:.1rem .55rem;border-radius:1rem;border:1px solid currentColor;font-weight:600;font-size:.9rem;white-space:nowrap}
.sound{background:var(--sound-paper);color:var(--sound-ink)}
.caution{background:var(--caution-paper);color:var(--caution-ink)}
.withheld,.withhold{background:var(--withheld-paper);color:var(--withheld-ink)}
.note{background:var(--raised);color:var(--soft)}
.findings{list-style:none;margin:.6rem 0;padding:0;display:grid;gap:.45rem}
.findings>li{border-left:.35rem solid currentColor;padding:.45rem .7rem;border-radius:.2rem}
.findings .do{display:block;color:var(--ink)}
.findings ul{margin:.2rem 0;padding-left:1.2rem}
.remedies>li{margin:.5rem 0}
.note .do{color:var(--soft)}
code{font:.9em ui-monospace,"DejaVu Sans Mono",Menlo,Consolas,monospace}
.answers{display:flex;flex-wrap:wrap;gap:.6rem 2rem;margin:.7rem 0;padding:0}
.answers div{min-width:8rem}
.answers dt{color:var(--soft);font-size:.9rem}
.answers dd{margin:0;font-size:1.2rem;font-variant-numeric:tabular-nums}
.answers .unit{font-size:.85em;color:var(--soft)}
table{border-collapse:collapse;font-size:.92rem;margin:.4rem 0}
caption{text-align:left;color:var(--soft);padding:.2rem 0}
th,td{padding:.22rem .7rem .22rem 0;text-align:left;vertical-align:top;border-bottom:1px solid var(--grid)}
th{font-weight:600}
td.number,th.number,.numbers td,.numbers th[scope=col]:not(:first-child){text-align:right}
.scroll{overflow-x:auto}
.picture{margin:1.1rem 0;padding:.9rem 1rem;background:var(--raised);border:1px solid var(--grid);border-radius:.4rem;break-inside:avoid}
.picture svg{display:block;width:100%;height:auto}
.picture .drawing{overflow-x:auto}
.picture .drawing svg{min-width:34rem}
.picture figcaption p{margin:.1rem 0 .5rem}
.picture details{margin-top:.4rem;font-size:.92rem}
summary{cursor:pointer;color:var(--accent)}
summary:focus-visible,a:focus-visible,[tabindex]:focus-visible{outline:3px solid var(--accent);outline-offset:2px}
a{color:var(--accent)}
svg text{fill:var(--ink);font:12.5px system-ui,"Segoe UI",Roboto,"Helvetica Neue",Arial,sans-serif;font-variant-numeric:tabular-nums}
svg text.soft{fill:var(--soft)}
svg text.strong{font-weight:600}
svg text.halo{paint-order:stroke;stroke:var(--raised);stroke-width:4px;stroke-linejoin:round}
svg text.end{text-anchor:end}
svg text.middle{text-anchor:middle}
.axis{stroke:var(--line);fill:none}
.rule{stroke:var(--grid);fill:none}
.limit{stroke:var(--line);stroke-dasharray:2 3;fill:none}
.ink-line{stroke:var(--ink);fill:none}
.ink-fill{fill:var(--ink)}
.raised-fill{fill:var(--raised)}
.grid-fill{fill:var(--grid)}
.accent-line{stroke:var(--accent);fill:none}
.accent-fill{fill:var(--accent)}
.band{fill:var(--ink);fill-opacity:.08}
${['V2', 'V3', 'V4', 'V5', 'bound', 'bound-other']
  .map(
    (name) =>
      `.edge-${name}{stroke:var(--${name})}.line-${name}{stroke:var(--${name});fill:none}.tint-${name}{fill:var(--${name});fill-opacity:.28}`,
  )
  .join('\n')}
@media print{
@page{margin:14mm}
body{font-size:10.5pt}
.sheet{max-width:none;padding:0}
.picture{border-color:#bbb}
.picture .drawing{overflow:visible}
.picture details:not([open]){display:none}
.picture .drawing svg{min-width:0}
h2,h3{break-after:avoid}
.findings li,.answers,tr{break-inside:avoid}
.screen-only{display:none}
.sound,.caution,.withheld,.withhold{print-color-adjust:exact;-webkit-print-color-adjust:exact}
.colour-shown{print-color-adjust:exact;-webkit-print-color-adjust:exact}
}
`;
