// Before the first paint, so that a dark page does not flash light; the only script that is no module.
document.documentElement.dataset.theme = localStorage.getItem("lamwright-theme") ?? "system";
