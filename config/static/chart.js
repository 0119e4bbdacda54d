/* Draws each [data-figure] from the JSON script of that id. Numbers come from the server; only colours are put in here. */
"use strict";

(() => {
  const config = { displaylogo: false, responsive: true, displayModeBar: false };
  const scheme = window.matchMedia("(prefers-color-scheme: dark)");

  const colourOf = (name, style) => {
    const [variable, alpha] = name.slice(1).split("/");
    return style.getPropertyValue(`--${variable}`).trim() + (alpha || "");
  };

  /* "@within" becomes the stylesheet's --within, "@within/2b" the same with that alpha. */
  const coloured = (node, style) => {
    if (typeof node === "string") return node.startsWith("@") ? colourOf(node, style) : node;
    if (Array.isArray(node)) return node.map((item) => coloured(item, style));
    if (node === null || typeof node !== "object") return node;
    return Object.fromEntries(Object.entries(node).map(([key, value]) => [key, coloured(value, style)]));
  };

  const narrow = (layout, element) =>
    element.clientWidth < 520 ? { ...layout, annotations: [], margin: { ...layout.margin, l: 40, r: 4 }, yaxis: { ...layout.yaxis, title: undefined } } : layout;

  const draw = (element) => {
    const source = document.getElementById(element.dataset.figure);
    if (!source) return;
    const figure = coloured(JSON.parse(source.textContent), getComputedStyle(document.documentElement));
    window.Plotly.react(element, figure.data, narrow(figure.layout, element), config);
  };

  const drawAll = () => document.querySelectorAll("[data-figure]").forEach(draw);
  document.addEventListener("DOMContentLoaded", drawAll);
  document.addEventListener("htmx:afterSettle", drawAll);
  scheme.addEventListener("change", drawAll);
})();
