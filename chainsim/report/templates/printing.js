// Opens every folded part for printing and folds it again afterwards.
const folded = [];
window.addEventListener("beforeprint", () => {
  for (const part of document.querySelectorAll("details:not([open])")) {
    part.open = true;
    folded.push(part);
  }
});
window.addEventListener("afterprint", () => {
  while (folded.length) folded.pop().open = false;
});
