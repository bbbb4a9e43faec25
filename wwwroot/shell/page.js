// What pages need of the browser: the width a picture has, and taking things home.
const watched = new WeakMap();

/** Tells .NET the width of an element now and whenever it changes. */
export function watchWidth(element, owner) {
  let last = 0;
  const observer = new ResizeObserver(entries => {
    const width = Math.round(entries[0].contentRect.width);
    if (width > 0 && Math.abs(width - last) > 4) { last = width; owner.invokeMethodAsync("WidthChanged", width); }
  });
  observer.observe(element);
  watched.set(element, observer);
}

export function unwatch(element) { watched.get(element)?.disconnect(); watched.delete(element); }

/** Copies text; over plain HTTP from another computer browsers offer no clipboard, only the older way. */
export function copy(text) {
  if (navigator.clipboard) return navigator.clipboard.writeText(text);
  const area = document.createElement("textarea");
  area.value = text;
  document.body.append(area);
  area.select();
  document.execCommand("copy");
  area.remove();
}

export function save(name, text, type) { saveBlob(name, new Blob([text], { type })); }

function saveBlob(name, blob) {
  const a = document.createElement("a");
  a.href = URL.createObjectURL(blob);
  a.download = name;
  document.body.append(a);
  a.click();
  a.remove();
  setTimeout(() => URL.revokeObjectURL(a.href), 10000);
}

/** The first picture of the page as SVG text with its colours written out, so that it looks the same anywhere. */
export function picture(selector) {
  const svg = document.querySelector((selector ?? "main") + " figure svg");
  if (!svg) return null;
  const copy = svg.cloneNode(true), from = [svg, ...svg.querySelectorAll("*")], to = [copy, ...copy.querySelectorAll("*")];
  from.forEach((e, i) => {
    const style = getComputedStyle(e);
    for (const p of ["fill", "stroke", "stroke-width", "stroke-dasharray", "opacity", "fill-opacity", "font-size", "font-weight", "font-family", "text-anchor"]) {
      const v = style.getPropertyValue(p);
      if (v) to[i].style.setProperty(p, v);
    }
    to[i].removeAttribute("class");
  });
  copy.setAttribute("xmlns", "http://www.w3.org/2000/svg");
  const box = svg.viewBox.baseVal;
  copy.setAttribute("width", box.width);
  copy.setAttribute("height", box.height);
  return copy.outerHTML;
}

export function saveSvg(name) { const text = picture(); if (text) save(name + ".svg", text, "image/svg+xml"); return !!text; }

export async function savePng(name) {
  const canvas = document.querySelector("main figure canvas[data-picture]");
  if (canvas) { canvas.toBlob(b => saveBlob(name + ".png", b)); return true; }
  const text = picture();
  if (!text) return false;
  const image = new Image();
  image.src = URL.createObjectURL(new Blob([text], { type: "image/svg+xml" }));
  await image.decode();
  const out = document.createElement("canvas"), scale = 2;
  out.width = image.width * scale; out.height = image.height * scale;
  const g = out.getContext("2d");
  g.fillStyle = getComputedStyle(document.documentElement).getPropertyValue("--sheet");
  g.fillRect(0, 0, out.width, out.height);
  g.scale(scale, scale);
  g.drawImage(image, 0, 0);
  URL.revokeObjectURL(image.src);
  out.toBlob(b => saveBlob(name + ".png", b));
  return true;
}

/** Sends chosen or dropped files to the portal and tells .NET how far it is. */
export function upload(input, drop, owner, address) {
  const send = files => {
    if (!files.length || drop.sending) return;
    const form = new FormData();
    for (const f of files) form.append("file", f, f.name);
    const request = new XMLHttpRequest();
    request.open("POST", address);
    request.upload.onprogress = e => e.lengthComputable && owner.invokeMethodAsync("UploadProgress", e.loaded / e.total);
    const done = (status, text) => { drop.sending = null; owner.invokeMethodAsync("UploadDone", status, text); };
    request.onload = () => done(request.status, request.responseText);
    request.onerror = () => done(0, "");
    request.onabort = () => done(-1, "");
    owner.invokeMethodAsync("UploadProgress", 0);
    drop.sending = request;
    request.send(form);
  };
  input.addEventListener("change", () => { send(input.files); input.value = ""; });
  // the input is a new one after every file, the place to drop on stays: listening twice would send twice
  if (drop.listens) return;
  drop.listens = true;
  drop.addEventListener("dragover", e => { e.preventDefault(); drop.classList.add("over"); });
  drop.addEventListener("dragleave", () => drop.classList.remove("over"));
  drop.addEventListener("drop", e => { e.preventDefault(); drop.classList.remove("over"); send(e.dataTransfer.files); });
}

/** Stops what is on its way. */
export function stopUpload(drop) { drop.sending?.abort(); }

export function print() { window.print(); }
