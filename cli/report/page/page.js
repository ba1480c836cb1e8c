"use strict";
// Copies a coordinate; without the clipboard of the browser, by a selection.
document.addEventListener("click", async (event) => {
  const button = event.target.closest("button.copy");
  if (!button) return;
  const text = button.dataset.copy;
  let done = true;
  try {
    await navigator.clipboard.writeText(text);
  } catch {
    const area = document.createElement("textarea");
    area.value = text;
    document.body.append(area);
    area.select();
    done = document.execCommand("copy");
    area.remove();
    button.focus();
  }
  const said = document.getElementById("said");
  said.textContent = done ? "copied: " + text.split("\n")[0] : "could not be copied";
  clearTimeout(said.timer);
  said.timer = setTimeout(() => { said.textContent = ""; }, 2500);
});
// On paper nothing can be opened any more.
addEventListener("beforeprint", () => {
  for (const d of document.querySelectorAll("details")) d.open = true;
});
