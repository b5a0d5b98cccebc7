// Open, save, report: the file picker and the download have to start in the page. Also the title of the browser tab,
// the question before leaving with unsaved changes, and the keys for save, undo and redo.
export function render({ model }) {
  const view = document.createElement("div")
  view.className = "live-view"
  const bar = view.appendChild(document.createElement("div"))
  bar.className = "bar"

  const picker = document.createElement("input")
  picker.type = "file"
  picker.accept = ".json,application/json,.html,text/html"
  picker.hidden = true
  picker.setAttribute("aria-label", "Scenario file or report")

  function button(text, title, act) {
    const made = document.createElement("button")
    made.type = "button"
    made.className = "press"
    made.textContent = text
    made.title = title
    made.addEventListener("click", act)
    return made
  }
  const save = () => model.send_msg({ act: "save" })
  const report = button("", "", () => model.send_msg({ act: "report" }))
  const showWriting = () => {
    report.textContent = model.writing ? "Stop report" : "Report"
    report.title = model.writing ? "The report is being written; press to stop" : "Write a report to keep or print"
    report.setAttribute("aria-busy", String(model.writing))
  }
  model.on("writing", showWriting)
  showWriting()
  // Saving under another name asks for it beside the button.
  const sheet = view.appendChild(document.createElement("div"))
  sheet.className = "saving"
  sheet.popover = "auto"
  sheet.dataset.placed = ""
  const label = sheet.appendChild(document.createElement("label"))
  label.textContent = "Name of the file"
  const wanted = label.appendChild(document.createElement("input"))
  wanted.className = "words"
  wanted.maxLength = 80
  const saveAs = (event) => {
    event.preventDefault()
    sheet.hidePopover()
    model.send_msg({ act: "save", name: wanted.value })
  }
  sheet.append(button("Save under this name", "", saveAs))
  wanted.addEventListener("keydown", (event) => { if (event.key === "Enter") saveAs(event) })
  const named = button("▾", "Save under another name", () => {
    const from = named.getBoundingClientRect()
    sheet.style.inset = `${from.bottom + 4}px ${Math.max(4, window.innerWidth - from.right)}px auto auto`
    sheet.showPopover()
    wanted.value = model.title
    wanted.select()
  })
  named.classList.add("narrow")
  named.setAttribute("aria-label", "Save under another name")
  bar.append(
    button("Open", "Open a scenario file, or a report with its scenario", () => picker.click()),
    button("Save", "Save as a scenario file (Ctrl+S)", save),
    named,
    report,
    picker,
  )

  picker.addEventListener("change", () => {
    const file = picker.files[0]
    picker.value = ""          // the same file can be chosen again
    if (file) take(file)
  })
  async function take(file) {
    if (file.size > model.limit) return model.send_msg({ act: "too large", name: file.name, size: file.size })
    const bytes = new Uint8Array(await file.arrayBuffer())
    let text = ""
    for (let at = 0; at < bytes.length; at += 8192) text += String.fromCharCode(...bytes.subarray(at, at + 8192))
    model.send_msg({ act: "open", name: file.name, content: btoa(text) })
  }

  // A file let go anywhere on the page is opened; over a field for files it belongs to that field.
  const carries = (event) => event.dataTransfer?.types.includes("Files") && event.composedPath()[0].type !== "file"
  const mark = (on) => document.documentElement.toggleAttribute("data-dropping", on)
  const onDrag = (event) => { if (carries(event)) { event.preventDefault(); mark(true) } }
  const onDragLeave = (event) => { if (!event.relatedTarget) mark(false) }
  const onDrop = (event) => {
    mark(false)
    if (!carries(event)) return
    event.preventDefault()
    if (event.dataTransfer.files[0]) take(event.dataTransfer.files[0])
  }
  document.addEventListener("dragover", onDrag)
  document.addEventListener("dragleave", onDragLeave)
  document.addEventListener("drop", onDrop)

  model.on("msg:custom", (event) => {
    const { text, name, type } = event.data ?? event
    if (type === "image/png") painted(text).then((picture) => hand(picture, name))
    else hand(new Blob([text], { type }), name)
  })
  function hand(content, name) {
    const link = document.createElement("a")
    link.href = URL.createObjectURL(content)
    link.download = name
    link.click()
    setTimeout(() => URL.revokeObjectURL(link.href), 10_000)
  }
  // A drawing as a picture, fine enough for a slide or a page of paper.
  const FINER = 2
  async function painted(svg) {
    const picture = new Image(), address = URL.createObjectURL(new Blob([svg], { type: "image/svg+xml" }))
    picture.src = address
    await picture.decode()
    const canvas = document.createElement("canvas")
    canvas.width = FINER * picture.naturalWidth
    canvas.height = FINER * picture.naturalHeight
    canvas.getContext("2d").drawImage(picture, 0, 0, canvas.width, canvas.height)
    URL.revokeObjectURL(address)
    return new Promise((made) => canvas.toBlob(made, "image/png"))
  }

  const inField = (event) => {
    const target = event.composedPath()[0]
    return target instanceof HTMLElement && (target.isContentEditable || target.tagName === "SELECT"
      || target.tagName === "TEXTAREA" || (target.tagName === "INPUT" && !["range", "checkbox"].includes(target.type)))
  }
  const onKey = (event) => {
    if (!(event.ctrlKey || event.metaKey) || event.altKey) return
    const key = event.key.toLowerCase()
    if (key === "s" && !event.shiftKey) { event.preventDefault(); save() }
    else if (key === "o" && !event.shiftKey) { event.preventDefault(); picker.click() }
    else if (key === "z" && !inField(event)) {
      event.preventDefault()
      model.send_msg({ act: event.shiftKey ? "redo" : "undo" })
    }
  }
  const onLeave = (event) => { if (model.unsaved) event.preventDefault() }
  const showTitle = () => { document.title = `${model.unsaved ? "● " : ""}${model.title} – Blendwright` }
  document.addEventListener("keydown", onKey)
  window.addEventListener("beforeunload", onLeave)
  model.on("title", showTitle)
  model.on("unsaved", showTitle)
  showTitle()

  // A reload asks for the same working copy: its name stands in the address.
  if (model.tab) {
    const address = new URL(window.location.href)
    if (address.searchParams.get("copy") !== model.tab) {
      address.searchParams.set("copy", model.tab)
      window.history.replaceState(null, "", address)
    }
  }
  model.on("remove", () => {
    document.removeEventListener("keydown", onKey)
    document.removeEventListener("dragover", onDrag)
    document.removeEventListener("dragleave", onDragLeave)
    document.removeEventListener("drop", onDrop)
    window.removeEventListener("beforeunload", onLeave)
  })
  return view
}
