// The theme that theme.js chose, for the component library.
export function isDark() { return document.documentElement.dataset.theme === "dark"; }
