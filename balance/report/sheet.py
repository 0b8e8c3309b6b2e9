"""How the page looks: dark ink on white, one column of text, figures side by side where there is room; the same on paper."""

from __future__ import annotations

STYLE = """
:root { color-scheme: light; }
* { box-sizing: border-box; }
body { margin: 0 auto; max-width: 68rem; padding: 1rem 1.2rem 4rem; color: #20262e; background: #fff;
  font: 16px/1.5 Georgia, "Noto Serif", serif; overflow-wrap: break-word; }
h1, h2, h3, nav, table, figcaption, summary, dt { font-family: "Noto Sans", "DejaVu Sans", Verdana, sans-serif; }
h1 { font-size: 1.5rem; line-height: 1.25; margin: .4rem 0 1rem; }
h2 { font-size: 1.2rem; margin: 2.4rem 0 .5rem; border-bottom: 2px solid #17456e; }
h3 { font-size: 1rem; margin: 1.6rem 0 .4rem; }
.answer { font-size: 1.1rem; padding: .6rem .9rem; border: 2px solid #20262e; border-left-width: .7rem; }
.answer.met { border-color: #17456e; } .answer.unmet { border-color: #c4571a; }
nav ul { columns: 2 13rem; padding-left: 1.1rem; font-size: .88rem; margin: .6rem 0; }
a { color: #17456e; }
.wide { overflow-x: auto; margin: .5rem 0; }
table { border-collapse: collapse; font-size: .78rem; font-variant-numeric: tabular-nums; overflow-wrap: normal; }
caption { text-align: left; font-weight: bold; padding: .2rem 0; }
th, td { text-align: left; vertical-align: top; padding: .22rem .7rem .22rem 0; border-bottom: 1px solid #c9ced4; }
thead th { vertical-align: bottom; border-bottom: 2px solid #5d6875; }
tbody th { font-weight: normal; }
td:not(.words), tbody th { white-space: nowrap; } td.words { min-width: 10rem; }
tr.unmet > * { background: #fbeee6; } tr.unmet th { font-weight: bold; }
tr.unmet th::before { content: "\\2717\\00a0"; color: #c4571a; }
tr.met th::before { content: "\\2713\\00a0"; color: #17456e; }
.note { font-size: .86rem; color: #454f5b; margin: .2rem 0 1rem; max-width: 48rem; }
.figures { display: grid; grid-template-columns: repeat(auto-fill, minmax(min(100%, 24rem), 1fr)); gap: .8rem 1.2rem; }
figure { margin: .4rem 0; min-width: 0; max-width: 32rem; }
.broad figure { max-width: none; } figure img { display: block; width: 100%; height: auto; }
figcaption { font-size: .8rem; color: #454f5b; min-height: 1.2rem; }
dt { font-weight: bold; font-size: .9rem; margin-top: .8rem; } dd { margin: 0; max-width: 48rem; }
details { margin: .5rem 0; border-left: 3px solid #c9ced4; padding-left: .7rem; }
summary { cursor: pointer; padding: .25rem 0; font-weight: bold; font-size: .9rem; }
@media screen and (max-width: 44rem) {
  body { padding: .6rem .8rem 3rem; }
  table.cards, .cards caption, .cards tbody, .cards tr, .cards th { display: block; white-space: normal; }
  .cards td { display: inline; white-space: normal; margin-right: .7rem; }
  .cards thead { position: absolute; clip-path: inset(50%); height: 1px; width: 1px; overflow: hidden; }
  .cards tr { padding: .4rem .5rem; border: 1px solid #c9ced4; margin-bottom: .5rem; }
  .cards th, .cards td { border: 0; padding: .05rem 0; }
  .cards tbody th { font-weight: bold; font-size: .9rem; }
  .cards td::before { content: attr(data-head) ": "; color: #454f5b; font-weight: normal; }
  .cards td.none { display: none; }
}
@media print {
  @page { margin: 14mm 13mm; }
  body { font-size: 9.5pt; max-width: none; padding: 0; } nav { display: none; }
  h2, h3, caption, summary, dt { break-after: avoid; } figure, tr, .answer { break-inside: avoid; }
  thead { display: table-header-group; }
  .figures { grid-template-columns: 1fr 1fr; } .wide { overflow: visible; }
  table { font-size: 7.4pt; } td.words { min-width: 0; }
  td:not(.words), tbody th { white-space: normal; overflow-wrap: break-word; }
  th, td { padding-right: .4rem; } tr.unmet > * { background: none; }
  .stance { break-before: page; } a { color: inherit; text-decoration: none; }
  details { border: 0; padding: 0; } details::details-content { content-visibility: visible; block-size: auto; }
}
"""

OPEN_IN_PRINT = ("addEventListener('beforeprint',function(){document.querySelectorAll('details').forEach("
                 "function(d){d.open=true})})")
