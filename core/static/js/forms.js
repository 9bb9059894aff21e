// Small help for forms; every form works without it.
"use strict";

// A summary of faults is read out first.
const faults = document.querySelector("[data-faults]");
if (faults) faults.focus();

// A file that is too large is named before it is sent.
for (const input of document.querySelectorAll("input[type=file][data-limit]")) {
  input.addEventListener("change", () => {
    const limit = Number(input.dataset.limit);
    const large = [...input.files].find((file) => file.size > limit);
    input.setCustomValidity(large ? `${large.name} is larger than ${Math.round(limit / 1048576)} MB.` : "");
    input.reportValidity();
  });
}

// A form is sent once, however often its button is pressed.
for (const form of document.querySelectorAll("form[method=post]")) {
  form.addEventListener("submit", (event) => {
    if (form.dataset.sent) event.preventDefault();
    form.dataset.sent = "yes";
  });
}
window.addEventListener("pageshow", () => {
  for (const form of document.querySelectorAll("form[data-sent]")) delete form.dataset.sent;
});

// Who fills in the number of a choice has made that choice.
for (const input of document.querySelectorAll("[data-chooses]")) {
  input.addEventListener("input", () => { document.getElementById(input.dataset.chooses).checked = true; });
}

// A name for a shared error is asked for only where a column is one.
for (const select of document.querySelectorAll("select[data-names]")) {
  const named = document.getElementById(select.dataset.names);
  const show = () => { named.hidden = select.value !== "shared"; };
  select.addEventListener("change", show);
  show();
}
