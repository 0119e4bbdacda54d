/* Small conveniences; every page works without them. */
"use strict";

/* A filter applies as soon as it is chosen. */
document.addEventListener("change", (event) => {
  const field = event.target.closest("[data-submit-on-change]");
  if (field && field.form) field.form.requestSubmit();
});
