"use strict";
(() => {
  const plots = [...document.querySelectorAll(".plot")];
  const selects = [...document.querySelectorAll("select.choose")];
  const drawn = new Map();
  let chosen = 0;
  let ready = false;

  const specs = (plot) => JSON.parse(document.getElementById("d-" + plot.id.slice(2)).textContent);

  function draw(plot) {
    if (!ready) return;
    const list = drawn.get(plot) || specs(plot);
    drawn.set(plot, list);
    const spec = list[plot.dataset.each ? chosen : 0];
    const hidden = hiddenIn(plot);
    const data = spec.data.map((t) => ({ ...t, visible: hidden.has(t.name) ? "legendonly" : true }));
    Plotly.react(plot, data, structuredClone(spec.layout), { responsive: true, displayModeBar: false, scrollZoom: false });
    plot.dataset.drawn = "yes";
  }

  function hiddenIn(plot) {
    const off = plot.closest("figure").querySelectorAll(".toggle[aria-pressed=false]");
    const escape = (text) => text.replace(/&/g, "&amp;").replace(/</g, "&lt;").replace(/>/g, "&gt;");
    return new Set([...off].map((b) => escape(b.dataset.trace)));
  }

  const watcher = new IntersectionObserver((entries) => {
    for (const entry of entries) {
      if (entry.isIntersecting && !drawn.has(entry.target)) draw(entry.target);
    }
  }, { rootMargin: "300px" });

  function choose(value) {
    chosen = Number(value);
    for (const select of selects) select.value = String(chosen);
    const name = selects.length ? selects[0].options[chosen].textContent : "";
    for (const span of document.querySelectorAll(".chosen")) span.textContent = name;
    for (const part of document.querySelectorAll("[data-candidate]")) part.hidden = Number(part.dataset.candidate) !== chosen;
    for (const plot of drawn.keys()) if (plot.dataset.each) draw(plot);
  }

  for (const select of selects) select.addEventListener("change", () => choose(select.value));
  for (const button of document.querySelectorAll(".toggle")) {
    button.addEventListener("click", () => {
      button.setAttribute("aria-pressed", button.getAttribute("aria-pressed") === "true" ? "false" : "true");
      const plot = button.closest("figure").querySelector(".plot");
      if (drawn.has(plot)) draw(plot);
    });
  }

  function drawAll() { for (const plot of plots) if (!drawn.has(plot)) draw(plot); }
  window.addEventListener("beforeprint", () => {
    drawAll();
    for (const fold of document.querySelectorAll("details")) fold.open = true;
  });

  async function unpack() {
    const packed = Uint8Array.from(atob(document.getElementById("plotter").textContent), (c) => c.charCodeAt(0));
    const stream = new Blob([packed]).stream().pipeThrough(new DecompressionStream("gzip"));
    const script = document.createElement("script");
    script.textContent = await new Response(stream).text();
    document.head.append(script);
    ready = true;
    for (const plot of plots) watcher.observe(plot);
    document.documentElement.dataset.ready = "yes";
  }
  unpack();
})();
