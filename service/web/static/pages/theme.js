// Chooses the paper before anything is painted; a classic script, as modules run too late for that.
// Left out: the switch (shell.js).
(() => {
  let kept = null;
  try {
    kept = localStorage.getItem("armspan-theme");
  } catch {
    // A panel without storage follows its screen.
  }
  if (kept === "light" || kept === "dark") document.documentElement.dataset.theme = kept;
})();
