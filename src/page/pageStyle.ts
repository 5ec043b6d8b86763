/** What the page needs beyond the style of reports. */
export const PAGE_STYLE = `
html{scroll-padding-bottom:7rem;scroll-padding-top:1rem}
.sheet{padding-bottom:7rem}
.head{max-width:60rem;margin:0 auto;padding:1.5rem 1.25rem 0}
button,.button{font:inherit;color:var(--accent-ink);background:var(--accent);border:1px solid var(--accent);border-radius:.35rem;padding:.35rem .8rem;cursor:pointer;display:inline-block;min-height:2.2rem}
button.quiet{background:var(--raised);color:var(--accent)}
button[aria-disabled=true]{background:transparent;color:var(--soft);border-color:var(--line);cursor:default}
button:focus-visible,.button:focus-within,input:focus-visible,select:focus-visible,textarea:focus-visible{outline:3px solid var(--accent);outline-offset:2px}
.file-input{position:absolute;opacity:0;width:1px;height:1px}
input,select,textarea{font:inherit;color:var(--ink);background:var(--raised);border:1px solid var(--line);border-radius:.3rem;padding:.3rem .45rem;max-width:100%}
textarea{display:block;width:100%;margin:.3rem 0;font-family:ui-monospace,monospace}
input[aria-invalid=true]{border:2px solid var(--withheld-ink)}
.narrow{width:6.5rem}
.inline-form{display:flex;flex-wrap:wrap;gap:.5rem 1rem;align-items:center;margin:.5rem 0}
.paste{padding:.5rem 0}
.files{list-style:none;padding:0;display:grid;gap:.5rem}
.files>li{background:var(--raised);border:1px solid var(--grid);border-radius:.4rem;padding:.4rem .8rem}
.file-line{display:flex;flex-wrap:wrap;gap:.3rem .8rem;align-items:center}
.understood{white-space:pre-wrap}
.cuvette{border:1px solid var(--line);border-radius:.4rem;margin:.7rem 0;padding:.4rem .9rem .5rem;background:var(--raised);min-width:0}
.cuvette legend{font-weight:600;padding:0 .3rem}
.cells{display:flex;flex-wrap:wrap;gap:.5rem .8rem;align-items:start}
.cell{display:flex;flex-direction:column;gap:.15rem;flex:1 1 10rem;min-width:0}
.cell.narrow{flex:0 1 6.5rem;width:auto}
.cell label{font-size:.88rem;color:var(--soft)}
.cell input,.cell select{width:100%}
.row-end{flex:0 0 auto;align-self:end}
.row-answer{margin:.5rem 0 .1rem}
.beside{padding:.4rem .65rem;border-radius:.25rem;border-left:.3rem solid currentColor;margin:.3rem 0}
.cell .beside{font-size:.88rem}
.cell:has(.beside){flex:1 1 20rem}
.first{background:var(--raised);border:1px solid var(--grid);border-radius:.4rem;padding:.4rem 1rem .7rem}
.first ol{padding-left:1.3rem}
.demo-buttons{display:flex;flex-wrap:wrap;gap:.5rem}
.strip{position:fixed;left:0;right:0;bottom:0;background:var(--raised);border-top:2px solid var(--accent);padding:.4rem 1.25rem;max-height:30vh;overflow-y:auto}
.strip p{max-width:57.5rem;margin:.1rem auto}
.unseen{position:absolute;width:1px;height:1px;overflow:hidden;clip-path:inset(50%);white-space:nowrap}
.skip{position:absolute;left:-100rem}
.skip:focus{left:1rem;top:1rem;background:var(--raised);padding:.5rem 1rem;z-index:2}
.drop-here{position:fixed;inset:1rem;display:grid;place-items:center;background:var(--raised);border:3px dashed var(--accent);border-radius:1rem;font-size:1.3rem;margin:0;z-index:3}
progress{accent-color:var(--accent)}
section section h2{font-size:1.15rem}
@media print{.strip,.head,.first,.skip,button,.button,.cuvette,.files{display:none}}
`;
