"use strict";
// The dossier's own program: changes the look and keeps it in the address, copies a sentence.

const boxes = [...document.querySelectorAll('input[name="look"]')];

/** Shows a look, and lets the links back to the report carry it. */
function show(look) {
  document.documentElement.dataset.look = look;
  for (const box of boxes) box.checked = box.value === look;
  for (const link of document.querySelectorAll("a[data-at]")) {
    const chosen = look === "auto" ? link.dataset.at : `at=${link.dataset.at}&look=${look}`;
    link.href = `${link.href.split("#")[0]}#${chosen}`;
  }
}

/** Returns the look that the address asks for. */
function asked() {
  const wanted = new URLSearchParams(location.hash.slice(1)).get("look");
  return boxes.some((box) => box.value === wanted) ? wanted : "auto";
}

document.documentElement.dataset.program = "";
show(asked());
addEventListener("hashchange", () => {
  if (location.hash.includes("=")) show(asked());
});
for (const box of boxes) {
  box.addEventListener("change", () => {
    history.replaceState(null, "", box.value === "auto" ? location.pathname + location.search : `#look=${box.value}`);
    show(box.value);
  });
}
