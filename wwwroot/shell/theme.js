// Sets light or dark before the first paint, so that a page never flashes; the choice is kept in this browser only.
(() => {
  const root = document.documentElement, key = "gaugeyard-theme", query = matchMedia("(prefers-color-scheme: dark)");
  const apply = () => root.dataset.theme = (localStorage.getItem(key) ?? (query.matches ? "dark" : "light"));
  apply();
  query.addEventListener("change", apply);
  document.addEventListener("click", e => {
    if (!e.target.closest("[data-switch-theme]")) return;
    localStorage.setItem(key, root.dataset.theme === "dark" ? "light" : "dark");
    apply();
    dispatchEvent(new Event("gaugeyard-theme"));
  });
})();
