/** The page's look: dark ink on white, nothing that needs colour to be read, fit for paper. */
export const STYLE = `
:root { color-scheme: light; --ink: #16202a; --soft: #5a6672; --rule: #c9d0d6; --fill: #2d4a5e; }
* { box-sizing: border-box; }
body { margin: 0 auto; max-width: 74rem; padding: 2rem 1.5rem 4rem; color: var(--ink); background: #fff;
  font: 15px/1.5 Georgia, 'Times New Roman', serif; }
h1 { margin: 0; font-size: 2rem; line-height: 1.2; font-weight: normal; }
h2 { margin: 2.2rem 0 0.6rem; padding-bottom: 0.2rem; border-bottom: 2px solid var(--ink); font-size: 1.15rem; }
header p { margin: 0.3rem 0 0; color: var(--soft); }
.caution, .broken { margin: 1.2rem 0 0; padding: 0.6rem 0.9rem; border: 1px solid var(--ink); border-left-width: 6px; }
.broken { border-width: 3px; }
dl { display: grid; grid-template-columns: repeat(auto-fill, minmax(21rem, 1fr)); gap: 0 2.5rem; margin: 0; }
dl div { display: flex; justify-content: space-between; gap: 1rem; padding: 0.25rem 0; border-bottom: 1px solid var(--rule); }
dt { color: var(--soft); }
dd { margin: 0; text-align: right; }
section { overflow-x: auto; }
table { width: 100%; border-collapse: collapse; font-variant-numeric: tabular-nums lining-nums; }
.narrow table { max-width: 24rem; }
caption { padding: 0 0 0.4rem; text-align: left; color: var(--soft); }
th, td { padding: 0.25rem 0.6rem; border-bottom: 1px solid var(--rule); text-align: right; vertical-align: baseline; }
th { border-bottom: 1px solid var(--ink); font-weight: bold; vertical-align: bottom; }
th:first-child, td:first-child { padding-left: 0; }
.text { text-align: left; }
td:not(.text), .no { white-space: nowrap; }
.no { padding: 0 0.4rem; background: var(--ink); color: #fff; }
.plots { display: grid; grid-template-columns: repeat(auto-fill, minmax(20rem, 1fr)); gap: 1.2rem 1.5rem; }
figure { margin: 0; break-inside: avoid; }
figcaption { color: var(--soft); text-align: center; font-size: 0.9rem; }
svg { display: block; width: 100%; height: auto; }
svg text { fill: var(--ink); font: 11px Georgia, 'Times New Roman', serif; }
svg .note { font-style: italic; }
svg circle, svg rect { fill: var(--fill); }
svg rect { stroke: #fff; stroke-width: 1; }
svg path { fill: none; stroke: var(--ink); stroke-width: 1; }
svg .grid { stroke: var(--rule); stroke-width: 0.7; }
svg .thin { stroke: var(--fill); stroke-dasharray: 3 3; }
svg .whisker { stroke: var(--fill); stroke-width: 1.4; }
svg .line { stroke: var(--fill); stroke-width: 1.6; }
pre { overflow-x: auto; padding: 0.8rem; border: 1px solid var(--rule); font-size: 12px; line-height: 1.4; }
@media print { body { padding: 0; font-size: 11pt; } section { break-inside: avoid; } details > pre { white-space: pre-wrap; } }
`;
