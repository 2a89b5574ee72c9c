// SPDX-License-Identifier: MIT
// Stands inside of report.html. A page that was opened by double click may import no other file: so the modules lie
// in it as text, and each becomes a blob of its own, after those that it imports.
const sources = new Map(JSON.parse(document.getElementById("modules").textContent));
const urls = new Map();

function urlOf(name) {
  if (!urls.has(name)) {
    const source = sources.get(name).replace(
      /(\bfrom\s*|\bimport\s*)"\.\/([^"]+)"/g,
      (all, word, other) => word + JSON.stringify(urlOf(other)),
    );
    urls.set(name, URL.createObjectURL(new Blob([source], {type: "text/javascript"})));
  }
  return urls.get(name);
}

await import(urlOf("report.js"));
