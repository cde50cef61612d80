// The pages work without this file. It only makes three things kinder with JavaScript on.
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
