// The pages work without this file. It only makes some things kinder with JavaScript on.
"use strict";

// After a refused form, put the cursor where the first wrong entry is.
document.addEventListener("DOMContentLoaded", () => {
  const wrong = document.querySelector("main [aria-invalid='true']");
  if (wrong) wrong.focus({ preventScroll: false });
});

// Leaving a half-filled form by accident asks first; sending it does not.
(() => {
  let typed = false;
  document.addEventListener("input", (event) => {
    if (event.target.closest("form[data-guard]")) typed = true;
  });
  document.addEventListener("submit", () => { typed = false; });
  window.addEventListener("beforeunload", (event) => {
    if (typed) event.preventDefault();
  });
})();

// A select or box marked data-send sends its form when it changes (filters above a list).
document.addEventListener("change", (event) => {
  if (event.target.matches("[data-send]") && event.target.form) event.target.form.requestSubmit();
});

// Buttons and boxes marked data-shapes ask for the form's boxes anew. One such answer at a time: a second one waits for
// the first, an answer about the old boxes is called off, and what was typed meanwhile stands in the new boxes.
(() => {
  const typed = new Map(); // a box's id -> the box as last typed in, and when
  let shaping = null;
  let next = null;
  const shapes = (ctx) => ctx.sourceElement?.hasAttribute?.("data-shapes") ?? false;

  document.addEventListener("input", (event) => {
    if (event.target.id) typed.set(event.target.id, { box: event.target, at: performance.now() });
  }, true);
  document.addEventListener("htmx:config:request", (event) => {
    const { ctx } = event.detail;
    ctx.asked = performance.now();
    if (!shapes(ctx)) return;
    if (shaping) {
      next = ctx.sourceElement.id;
      event.preventDefault();
    } else {
      shaping = ctx;
    }
  });
  document.addEventListener("htmx:before:swap", ({ detail: { ctx } }) => {
    if (ctx === shaping) document.getElementById("check")?.dispatchEvent(new Event("htmx:abort"));
  });
  document.addEventListener("htmx:after:swap", ({ detail: { ctx } }) => {
    let last = null;
    for (const [id, { box, at }] of [...typed]) {
      const now = document.getElementById(id);
      if (at < ctx.asked || box.isConnected || !now) continue;
      if (now.value !== box.value) {
        now.value = box.value;
        now.dispatchEvent(new Event("input", { bubbles: true }));
      }
      if (!last || at > last.at) last = { box, now, at };
    }
    if (!last) return;
    last.now.focus({ preventScroll: true });
    if (last.now.setSelectionRange) last.now.setSelectionRange(last.box.selectionStart, last.box.selectionEnd);
  });
  document.addEventListener("htmx:finally:request", ({ detail: { ctx } }) => {
    if (ctx !== shaping) return;
    shaping = null;
    const again = next && document.getElementById(next);
    next = null;
    if (again) htmx.trigger(again, again.matches("button") ? "click" : "change");
  });
})();
