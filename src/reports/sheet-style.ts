/** Style of the printed sheet: paper, ink, rule, ice, heat, caution; the same names as on the page. */
export const SHEET_STYLE = `
:root{--paper:#fffdf8;--ink:#1d2126;--rule:#b9b4a7;--ice:#14508c;--heat:#9a3d17;--caution:#7a5600;color-scheme:light}
@page{size:auto;margin:8mm 11mm}
*{box-sizing:border-box}
html{background:var(--paper)}
body{margin:0;color:var(--ink);font:14px/1.35 Charter,"Bitstream Charter",Georgia,"DejaVu Serif",serif;font-variant-numeric:tabular-nums lining-nums}
main{max-width:820px;margin:0 auto;padding:16px}
header{display:flex;gap:20px;align-items:flex-start;justify-content:space-between;border-bottom:1px solid var(--ink);padding-bottom:8px}
header>div{flex:1}
h1{font-size:16px;font-weight:400;margin:0 0 4px}
.answer{font-size:20px;line-height:1.25}
p{margin:4px 0}
.caution{color:var(--caution);font-weight:700}
table{border-collapse:collapse;width:100%}
table+table{margin-top:8px}
caption{text-align:left;font-weight:700;padding:0 0 2px;border-bottom:1px solid var(--ink)}
th,td{padding:1px 0 1px 8px;text-align:right;font-weight:400;border-bottom:1px solid var(--rule);vertical-align:top}
th:first-child{text-align:left;padding-left:0}
.total th,.total td{border-top:1px solid var(--ink)}
.block{width:auto;border:1px solid var(--ink);font-size:14px;flex:0 0 auto}
.block th,.block td{text-align:left;padding:1px 8px}
.block th{border-right:1px solid var(--rule)}
.orders th{width:1%;white-space:nowrap}
.orders td{text-align:left}
figure{margin:8px 0}
svg{display:block;width:100%;height:auto}
svg text{font:12px/1 Charter,"Bitstream Charter",Georgia,"DejaVu Serif",serif;fill:var(--ink)}
svg .grid{stroke:var(--rule);stroke-width:.6}
svg .ink{stroke:var(--ink);stroke-width:1.4}
svg .heat{stroke:var(--heat);stroke-width:1.4;stroke-dasharray:7 3}
svg .limit{stroke:var(--caution);stroke-width:1.2;stroke-dasharray:2 3}
svg .ice{stroke:var(--ice);stroke-width:2}
svg .wash{fill:var(--ice);fill-opacity:.14}
svg .band{stroke:var(--ink);stroke-width:.6}
svg .hatch{stroke:var(--ink);stroke-width:1;fill:none}
svg .dot{fill:var(--ink)}
svg .missing{fill:var(--caution)}
.columns{display:grid;grid-template-columns:1fr 1fr;gap:0 24px}
section{margin-bottom:8px}
p+table{margin-top:8px}
footer{border-top:1px solid var(--ink);padding-top:4px;font-size:12px;line-height:1.25}
@media (max-width:640px){main{padding:8px}header{flex-direction:column}figure,section{overflow-x:auto}svg{min-width:700px}.columns{grid-template-columns:minmax(0,1fr)}table,.block{font-size:12px}th,td{padding-left:4px}}
@media print{html{background:none}body{font-size:10px;line-height:1.3}main{max-width:none;padding:0}h1{font-size:12px}.answer{font-size:14px}.block{font-size:10px}svg text{font-size:13px}footer{font-size:8.5px}}
`.trim();
