"""The look: one style sheet for the parts (class ``rz``, also in notebooks) and one for the page around them.

Colours are variables, light ones and, on a page, dark ones beside them. Nothing is loaded from anywhere.
"""

from __future__ import annotations

__all__ = ["PAGE", "PARTS"]

PARTS = """
.rz{--paper:#fbfaf5;--leaf:#f1efe6;--ink:#1b2330;--faint:#5b6472;--rule:#d6d2c4;--keen:#0b6b66;--guilty:#bd3d17;
--mark:#ffffff;color:var(--ink);background:var(--paper);font:1rem/1.5 ui-sans-serif,system-ui,sans-serif;
overflow-wrap:anywhere}
.rz *,.rz *::before{box-sizing:border-box}
.rz h1,.rz h2,.rz h3{font-family:ui-serif,Georgia,serif;font-weight:600;line-height:1.2;text-wrap:balance}
.rz h3{font-size:1.1rem;margin:1.6rem 0 .5rem}
.rz p{margin:.5rem 0;max-width:46rem}
.rz code,.rz pre,.rz textarea{font:.86rem/1.45 ui-monospace,Menlo,Consolas,monospace}
.rz pre{background:var(--leaf);border-left:3px solid var(--rule);padding:.6rem .8rem;margin:.5rem 0;
white-space:pre-wrap;user-select:all}
.rz pre.lines{white-space:pre;overflow-wrap:normal;width:max-content}
.rz .exact{user-select:all}
.rz textarea{width:100%;color:inherit;background:var(--leaf);border:1px solid var(--rule);padding:.5rem;resize:vertical}
.rz .faint{color:var(--faint)}
.rz .together{white-space:nowrap}
.rz .small{font-size:.86rem}
.rz .sheet{overflow-x:auto;overflow-y:hidden;max-width:100%}
.rz table{border-collapse:collapse;color:inherit;background:none;font-size:.94rem;margin:.5rem 0}
.rz caption{text-align:left;color:var(--faint);font-size:.86rem;padding-bottom:.3rem}
.rz th,.rz td{text-align:left;vertical-align:top;padding:.3rem .9rem .3rem 0;border-bottom:1px solid var(--rule);
background:none;overflow-wrap:normal}
.rz th{font-weight:600}
.rz thead th{color:var(--faint);font-size:.82rem;vertical-align:bottom}
.rz .n{text-align:right;font-variant-numeric:tabular-nums}
.rz .wide{width:100%;overflow-wrap:anywhere;min-width:9rem}
.rz dl{display:grid;grid-template-columns:max-content minmax(0,1fr);gap:.25rem 1rem;margin:.5rem 0}
.rz dt{color:var(--faint)}
.rz dd{margin:0}
.rz ul.plain{list-style:none;margin:.5rem 0;padding:0}
.rz .tag{display:inline-block;font-size:.8rem;font-weight:600;padding:0 .5em;border:1px solid currentColor;
border-radius:1em;color:var(--keen);white-space:nowrap}
.rz .tag.refuted,.rz .tag.pole,.rz .tag.path-dependent{color:var(--paper);background:var(--guilty);
border-color:var(--guilty)}
.rz .tag.undecided{color:var(--guilty);border-style:dashed}
.rz .checks li{border-bottom:1px solid var(--rule);padding:.5rem 0}
.rz .checks p{margin:.15rem 0}
.rz summary{cursor:pointer;color:var(--keen);width:fit-content;max-width:100%}
.rz :focus-visible{outline:2px solid var(--keen);outline-offset:2px}
.rz .note{border-left:3px solid var(--guilty);padding:.2rem .8rem;margin:.6rem 0;max-width:46rem}
.rz .note ul{margin:.2rem 0;padding-left:1.2rem}
.rz .gallery{display:grid;grid-template-columns:repeat(auto-fill,minmax(min(100%,9rem),1fr));gap:1.1rem 1.4rem;
align-items:start;margin:.6rem 0}
.rz .gallery.large{grid-template-columns:repeat(auto-fill,minmax(min(100%,17rem),1fr))}
.rz figure{margin:0;max-width:100%}
.rz figcaption{font-size:.86rem;color:var(--faint);margin-top:.3rem}
.rz figcaption ul{margin:.2rem 0;padding-left:1rem}
.rz .picture{display:block;max-width:100%;height:auto;color:var(--ink)}
.rz .chart .picture{width:34rem}
.rz .picture .guilty{fill:var(--guilty)}
.rz .picture .keen{fill:none;stroke:var(--keen)}
.rz .picture .keen.key{fill:var(--keen);stroke:none}
.rz .picture .keen.dot{fill:var(--keen);stroke:none}
.rz .picture circle.keen:not(.line):not(.dot){stroke:var(--keen)}
.rz .picture .line.guilty{stroke:var(--guilty);fill:none}
.rz .picture .cross{stroke:var(--mark)}
.rz .picture .figure{fill:var(--mark)}
.rz .picture .card{fill:var(--paper)}
.rz .picture .empty,.rz .picture .number{opacity:.65}
.rz math{font-size:1.1em}
.rz .series{line-height:2.4}
"""

PAGE = """
html{color-scheme:light dark;scroll-padding-top:1rem}
body{margin:0}
.rz.page{min-height:100vh;display:grid;grid-template-columns:minmax(0,1fr);padding:0 1rem 4rem}
.page header{padding:1.4rem 0 .6rem;border-bottom:3px double var(--rule)}
.page h1{font-size:1.7rem;margin:.2rem 0 .4rem}
.page h2{font-size:1.35rem;margin:2.4rem 0 .6rem;padding-top:.4rem;border-top:1px solid var(--rule)}
.page nav ol{display:flex;flex-wrap:wrap;gap:.2rem 1rem;list-style:none;margin:.8rem 0 0;padding:0}
.page a{color:var(--keen)}
.page nav a{display:inline-block;padding:.25rem 0}
.skip{position:absolute;left:-100vw}
.skip:focus{left:1rem;top:.3rem;background:var(--paper);padding:.3rem .6rem}
@media (min-width:68rem){
.rz.page{grid-template-columns:13rem minmax(0,62rem);column-gap:3rem;justify-content:center;grid-template-rows:auto 1fr}
.page header{grid-column:1 / -1}
.page nav{position:sticky;top:0;align-self:start;padding-top:1.4rem}
.page nav ol{display:block}
.page main{grid-column:2}
.page h1{font-size:2.1rem}
}
@media (max-width:30rem){
.rz dl{grid-template-columns:minmax(0,1fr);gap:0}
.rz dd{margin-bottom:.4rem}
.rz th,.rz td{padding-right:.55rem}
.rz .tag{white-space:normal}
.rz .counts thead th{writing-mode:vertical-rl;text-align:right;padding:0 .75rem .3rem 0}
.rz .counts td,.rz .counts th{padding-right:.75rem}
}
@media (prefers-color-scheme:dark){
.rz.page{--paper:#14181e;--leaf:#1d232b;--ink:#e7e4da;--faint:#a2a9b4;--rule:#39414c;--keen:#76cdc5;--guilty:#ff8f66;
--mark:#14181e}
}
@media print{
html{font-size:80%}
.rz.page{display:block;--paper:#ffffff;--leaf:#ffffff;--ink:#000000;--faint:#333333;--rule:#999999;--keen:#00504c;
--guilty:#9c2f0e;--mark:#ffffff;padding:0}
.page nav,.skip,.rz .copy{display:none}
.rz details::details-content{content-visibility:visible;block-size:auto}
.rz figure,.rz tr,.rz .checks li{break-inside:avoid}
.page h2,.rz h3,.rz summary{break-after:avoid}
.rz .sheet{overflow:visible}
}
"""
