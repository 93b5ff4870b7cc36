// What is wrong with the page as it stands now, as a list of sentences; run inside the page.
const done = arguments[arguments.length - 1];
const faults = [];
const words = (element) => (element.textContent || element.getAttribute("aria-label") || element.name || "")
  .trim().replace(/\s+/g, " ").slice(0, 40);
const inMain = (selector) => [...document.querySelectorAll(`main ${selector}`)]
  .filter((element) => element.checkVisibility({ visibilityProperty: true }));

// Nothing but a table's own box scrolls sideways (screen_U36).
const page = document.documentElement;
if (page.scrollWidth > page.clientWidth) {
  const wide = [...document.querySelectorAll("body *")].filter((element) =>
    element.getBoundingClientRect().right > page.clientWidth + 1 && !element.closest(".wide, .spoken, .sprite"));
  const names = wide.slice(-2).map((element) => `${element.tagName}.${element.getAttribute("class")}`);
  faults.push(`scrolls sideways: ${page.scrollWidth} in ${page.clientWidth}, ${names.join(", ")}`);
}

// Targets outside running text are 44 px, at the bench 56 px (screen_U140).
const atBench = document.body.classList.contains("bench");
for (const element of document.querySelectorAll(
  "a[href], button, input:not([type=hidden]), select, textarea, summary")) {
  if (!element.checkVisibility({ visibilityProperty: true }) || element.matches(".skip")) continue;
  if (element.matches("a") && getComputedStyle(element).display === "inline") continue;
  const isChoice = element.matches("[type=radio], [type=checkbox]");
  const box = (isChoice && element.closest("label") || element).getBoundingClientRect();
  const isWorked = element.closest("main") && element.matches("button, .button, input, select, textarea");
  const least = atBench && isWorked ? 56 : 44;
  if (box.height < least - 0.5 || box.width < least - 0.5) {
    faults.push(`target of ${box.width.toFixed(0)} × ${box.height.toFixed(0)}, at least ${least}: ` +
      `${element.tagName} “${words(element)}”`);
  }
}

// Tables are named, and no cell is blank (screen_U30, screen_U38).
for (const table of inMain("table")) {
  if (!table.caption) faults.push(`a table without caption: ${words(table)}`);
  const columns = Math.max(0, ...[...table.rows].map((row) => row.cells.length));
  if (columns > 3 && !table.closest(".wide")) faults.push(`a table of ${columns} columns without “wide”`);
  for (const cell of table.querySelectorAll("tbody td:not(.write), tbody th")) {
    if (!cell.textContent.trim() && !cell.querySelector("input, select, textarea, img, svg")) {
      faults.push(`a blank cell under “${words(table.caption || table)}” in row “${words(cell.parentElement)}”`);
    }
  }
}

// One main act a page.
if (!document.querySelector(".panes")) {
  const primary = inMain(".button.primary, .button.sign");
  if (primary.length > 1) faults.push(`${primary.length} main buttons: ${primary.map(words).join(" | ")}`);
}
if (document.querySelectorAll("h1").length !== 1) faults.push("not exactly one h1");

// The dark theme changes colours alone, so there the checker looks at colours alone.
const isDark = matchMedia("(prefers-color-scheme: dark)").matches;
const rules = isDark ? { runOnly: ["color-contrast", "link-in-text-block"] } : {};
axe.run(document, { resultTypes: ["violations"], ...rules }).then((result) => {
  for (const found of result.violations) {
    for (const node of found.nodes.slice(0, 3)) {
      faults.push(`axe ${found.id}: ${node.html.slice(0, 160)} ${node.failureSummary.slice(0, 260)}`);
    }
  }
  done(faults);
}, (error) => done([`axe could not run: ${error}`]));
