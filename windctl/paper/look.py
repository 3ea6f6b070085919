"""How pages look on a screen and on paper. Print leaves the paper's size to the printer: A4 and Letter both
serve. Everything reads without colour, and backgrounds carry no meaning, since printers leave them out."""

from __future__ import annotations

from windctl.paper.html import css_text

SERIF = "'Iowan Old Style', 'Palatino Linotype', Palatino, 'URW Palladio L', Georgia, 'DejaVu Serif', serif"
SANS = "system-ui, 'Segoe UI', 'DejaVu Sans', 'Liberation Sans', Helvetica, Arial, sans-serif"

_PAGE = """
:root { --ink: #1f1b16; --muted: #625b52; --rule: #cdc6bb; --copper: #96470f; }
* { box-sizing: border-box; }
html { font: 10.5pt/1.42 SANS; color: var(--ink); background: #fff;
  -webkit-text-size-adjust: 100%; }
body { max-width: 188mm; margin: 0 auto; padding: 8mm 6mm; font-variant-numeric: lining-nums; }
h1, h2 { font-family: SERIF; font-weight: 600; line-height: 1.15; margin: 0; text-wrap: balance; }
h1 { font-size: 27pt; letter-spacing: -0.01em; }
h2 { font-size: 14pt; margin: 0 0 2.5mm; padding-top: 1.6mm; border-top: 0.5mm solid var(--copper);
  break-after: avoid; }
ul { margin: 0 0 3mm; padding-left: 5mm; }
p { margin: 0 0 2mm; max-width: 66em; text-wrap: pretty; }
section { margin: 7mm 0 0; }
.title { display: flex; gap: 6mm; justify-content: space-between; align-items: flex-end; }
.title > div { min-width: 0; overflow-wrap: anywhere; }
.title figure { flex: 0 0 78mm; margin: 0; }
.kind { margin: 0 0 1mm; color: var(--copper); font-size: 9pt; letter-spacing: 0.09em; font-weight: 600;
  text-transform: uppercase; }
.sub { font-family: SERIF; font-size: 13.5pt; margin: 1.5mm 0 0; color: var(--muted); }
.key { display: grid; grid-template-columns: 0.7fr 1.55fr 1.2fr 0.95fr; margin: 5mm 0 0; }
.key div { padding: 0 3mm; border-left: 0.25mm solid var(--rule); min-width: 0; overflow-wrap: anywhere; }
.key div:first-child { padding-left: 0; border-left: 0; }
.key dt { color: var(--muted); font-size: 8.5pt; }
.key dd { margin: 0.5mm 0 0; font-family: SERIF; font-size: 13pt; white-space: nowrap;
  line-height: 1.2; font-weight: 600; font-variant-numeric: lining-nums tabular-nums; }
.key dd small { display: block; white-space: normal; font: 400 8.5pt/1.35 SANS; color: var(--muted); }
.warn { border: 0.4mm solid var(--ink); padding: 2mm 3mm; margin: 4mm 0 0; font-weight: 600; }
figure { margin: 0 0 3mm; break-inside: avoid; }
figure svg { display: block; width: 100%; height: auto; }
figcaption { color: var(--muted); font-size: 9pt; margin-top: 1mm; max-width: 62em; }
table { border-collapse: collapse; width: 100%; font-size: 9.2pt; margin: 0 0 4mm; }
caption { text-align: left; font-weight: 600; padding: 0 0 1mm; break-after: avoid; }
th, td { text-align: left; vertical-align: baseline; font-weight: 400; padding: 0.9mm 3mm 0.9mm 0;
  border-bottom: 0.2mm solid var(--rule); overflow-wrap: anywhere; }
thead th { color: var(--muted); font-size: 8.5pt; border-bottom: 0.35mm solid var(--ink);
  vertical-align: bottom; overflow-wrap: normal; }
tfoot th, tfoot td { font-weight: 600; border-bottom: 0; border-top: 0.35mm solid var(--ink); }
thead { display: table-header-group; }
tfoot { display: table-row-group; }
tr { break-inside: avoid; }
.n { text-align: right; white-space: nowrap; font-variant-numeric: lining-nums tabular-nums; }
th.n:last-child, td.n:last-child { padding-right: 0; }
.pairs th { color: var(--muted); width: 46%; }
.columns { columns: 3; column-gap: 7mm; }
.columns table { break-inside: avoid; font-size: 8.3pt; margin-bottom: 3.5mm; }
.columns th, .columns td { padding: 0.5mm 2mm 0.5mm 0; }
.columns caption { padding-bottom: 0.5mm; }
.story tr > :first-child { width: 5.2em; color: var(--muted); font-variant-numeric: tabular-nums; }
.story th, .story td { padding-top: 0.6mm; padding-bottom: 0.6mm; }
.since th, .since td:nth-child(2) { white-space: nowrap; }
.proofs .digest { font-size: 6.9pt; }
.proofs th { white-space: nowrap; }
table.whole { break-inside: avoid; }
code, .digest { font-family: ui-monospace, 'DejaVu Sans Mono', 'Liberation Mono', Consolas, monospace;
  font-size: 8.3pt; overflow-wrap: anywhere; }
code { white-space: nowrap; }
.columns .digest { font-size: 6.4pt; white-space: nowrap; }
.proof { display: flex; gap: 7mm; align-items: flex-start; break-inside: avoid; }
.proof > div { min-width: 0; flex: 1; }
.proof figure { flex: 0 0 31mm; }
@media screen and (max-width: 600px) { body { padding: 4mm; } .n { white-space: normal; }
  .title, .proof { flex-direction: column; align-items: flex-start; }
  .key { grid-template-columns: 1fr 1fr; row-gap: 3mm; } .key dd { white-space: normal; }
  .columns { columns: 1; }
  .title figure { flex-basis: auto; width: 100%; max-width: 78mm; } }
@media print {
  html { font-size: 9.6pt; }
  body { max-width: none; padding: 0; }
  section { margin-top: 5.5mm; }
  .whole { break-inside: avoid; }
}
""".replace("SERIF", SERIF).replace("SANS", SANS)


def report_css(foot: str) -> str:
    """The style of a report; `foot` stands below each printed page, beside the page's number."""
    margin = "font: 8pt SANS; color: #625b52;".replace("SANS", SANS)
    return (
        f"{_PAGE}@page {{ margin: 13mm 14mm 16mm;\n"
        f"  @bottom-left {{ content: {css_text(foot)}; {margin} }}\n"
        f'  @bottom-right {{ content: counter(page) " / " counter(pages); {margin} }} }}\n'
    )
