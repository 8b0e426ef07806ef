/** The looks of the report page: light, dark, and on paper. */
export const style = `:root{--text:#1c1c1c;--soft:#555;--back:#fff;--box:#f5f5f2;--grid:#e2e2e2;--line:#c9c9c4;--accent:#00558a;--limit:#B00020}
@media (prefers-color-scheme:dark){:root{--text:#ececec;--soft:#b5b5b5;--back:#17191b;--box:#22262a;--grid:#383d42;--line:#4a5056;--accent:#7cc4f0;--limit:#ff8a94}}
*{box-sizing:border-box}
body{margin:0 auto;max-width:1180px;padding:1.2rem 1.4rem 3rem;background:var(--back);color:var(--text);font:15px/1.45 system-ui,"DejaVu Sans",sans-serif}
h1{font-size:1.55rem;margin:.2rem 0}h2{font-size:1.2rem;margin:2rem 0 .6rem;border-bottom:1px solid var(--line);padding-bottom:.2rem}h3{font-size:1.02rem;margin:.2rem 0}
p{margin:.25rem 0}.soft{color:var(--soft)}
pre{background:var(--box);border:1px solid var(--line);border-radius:6px;padding:.8rem 1rem;overflow-x:auto;font:13px/1.45 ui-monospace,"DejaVu Sans Mono",monospace;white-space:pre}
pre.answer{white-space:pre-wrap}
dl.key{display:grid;grid-template-columns:repeat(auto-fill,minmax(250px,1fr));gap:.5rem;margin:0}
dl.key div{background:var(--box);border:1px solid var(--line);border-radius:6px;padding:.45rem .7rem}
dl.key dt{color:var(--soft);font-size:.85rem}dl.key dd{margin:0;font-weight:600;overflow-wrap:anywhere}
figure{margin:1.4rem 0;padding:0}figure img{max-width:100%;height:auto;background:#fff;border:1px solid var(--line);border-radius:6px}
.panel{position:relative;height:210px;margin:.3rem 0}.panel.tall{height:320px}
.moments{display:grid;gap:1rem}.pair{display:grid;grid-template-columns:1fr 1fr;gap:.6rem}.pair h3{grid-column:1/-1}
@media (max-width:760px){.pair{grid-template-columns:1fr}}
.controls{display:flex;flex-wrap:wrap;gap:.35rem;align-items:center;margin:.4rem 0}
.controls input[type=number]{width:6.5rem}.controls input[type=range]{flex:1;min-width:200px}
.hint{color:var(--soft);font-size:.85rem;margin-left:.6rem}
input,button{font:inherit;color:var(--text);background:var(--back);border:1px solid var(--line);border-radius:4px;padding:.15rem .4rem}
button{cursor:pointer;background:var(--box)}
:focus-visible{outline:3px solid var(--accent);outline-offset:2px}
.switches{display:flex;flex-wrap:wrap;gap:.2rem 1rem}.series{display:inline-flex;align-items:center;gap:.35rem;cursor:pointer}
.swatch{display:inline-block;width:26px;border-top:3px solid}
details{margin:.4rem 0}summary{cursor:pointer;color:var(--accent)}
.wide{overflow-x:auto}table{border-collapse:collapse;margin:.5rem 0;font-variant-numeric:tabular-nums}
caption{text-align:left;color:var(--soft);padding:.2rem 0}
th,td{border:1px solid var(--line);padding:.18rem .5rem;text-align:right;vertical-align:top}
th:first-child,td:first-child{text-align:left}thead th{background:var(--box);position:sticky;top:0}
button.sort{border:0;background:none;padding:0;font-weight:600}
th[aria-sort=ascending] button::after{content:" \\2191"}th[aria-sort=descending] button::after{content:" \\2193"}
.caution{border-left:5px solid #B00020;background:var(--box);padding:.6rem .9rem;border-radius:0 6px 6px 0}
a{color:var(--accent)}
@page{size:A4;margin:14mm}
@media print{:root{--text:#111;--soft:#444;--back:#fff;--box:#f6f6f4;--grid:#ddd;--line:#bbb;--accent:#00558a}
body{max-width:none;padding:0;font-size:10.5pt}.controls,.hint,details,nav{display:none}
figure,.pair,.caution,dl.key div,tr{break-inside:avoid}h2,h3{break-after:avoid}pre{white-space:pre-wrap;font-size:8.5pt;overflow:visible}
table{font-size:8pt}.panel{height:190px}.panel.tall{height:260px}canvas{max-width:100%}}
`;
