"use strict";
(() => {
  const root = document.documentElement;
  const button = document.getElementById("colours");
  const order = ["auto", "light", "dark"];
  const words = { auto: "as the system", light: "light", dark: "dark" };
  let now = "auto";
  const show = (choice) => {
    now = order.includes(choice) ? choice : "auto";
    if (now === "auto") root.removeAttribute("data-theme");
    else root.setAttribute("data-theme", now);
    button.textContent = "Colours: " + words[now];
    root.dispatchEvent(new Event("themechange"));
  };
  const kept = () => {
    try { return localStorage.getItem("driftwell-colours"); } catch (refused) { return null; }
  };
  const keep = (choice) => {
    try { localStorage.setItem("driftwell-colours", choice); } catch (refused) { /* not kept */ }
  };
  show(kept() || "auto");
  button.hidden = false;
  button.addEventListener("click", () => {
    show(order[(order.indexOf(now) + 1) % order.length]);
    keep(now);
  });

  const put = async (text, source) => {
    try {
      await navigator.clipboard.writeText(text);
      return true;
    } catch (refused) {
      const range = document.createRange();
      range.selectNodeContents(source);
      const chosen = getSelection();
      chosen.removeAllRanges();
      chosen.addRange(range);
      return document.execCommand("copy");
    }
  };
  for (const copy of document.querySelectorAll("button[data-copy]")) {
    const source = document.getElementById(copy.dataset.copy);
    const label = copy.textContent;
    copy.hidden = false;
    copy.addEventListener("click", async () => {
      const done = await put(source.textContent, source);
      copy.textContent = done ? "Copied" : "Marked: press Ctrl+C";
      setTimeout(() => { copy.textContent = label; }, 2500);
    });
  }

  const folds = () => document.querySelectorAll("details");
  let opened = [];
  addEventListener("beforeprint", () => {
    opened = [...folds()].filter((fold) => !fold.open);
    for (const fold of opened) fold.open = true;
  });
  addEventListener("afterprint", () => {
    for (const fold of opened) fold.open = false;
  });
})();
