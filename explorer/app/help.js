// The list of keys, and the keys that belong to the whole page. A field being typed into keeps its keys.
export function render({ model }) {
  const view = document.createElement("div")
  view.className = "live-view"
  const bar = view.appendChild(document.createElement("div"))
  bar.className = "bar"
  const button = bar.appendChild(document.createElement("button"))
  button.type = "button"
  button.className = "press icon"
  button.textContent = "?"
  button.title = "Keys and first steps (?)"
  button.setAttribute("aria-label", "Keys and first steps")
  button.setAttribute("aria-haspopup", "dialog")
  const sheet = view.appendChild(document.createElement("div"))
  sheet.className = "keys"
  sheet.popover = "auto"
  sheet.setAttribute("role", "dialog")
  sheet.setAttribute("aria-label", "Keys and first steps")
  sheet.dataset.placed = ""
  function part(tag, text, parent = sheet) {
    const made = parent.appendChild(document.createElement(tag))
    made.textContent = text
    return made
  }
  part("h3", "First steps")
  const steps = sheet.appendChild(document.createElement("ul"))
  for (const step of model.steps) part("li", step, steps)
  part("h3", "Keys")
  const list = sheet.appendChild(document.createElement("dl"))
  for (const [keys, what] of model.keys) { part("dt", keys, list); part("dd", what, list) }
  button.addEventListener("click", () => sheet.togglePopover())

  const onKey = (event) => {
    const path = event.composedPath(), target = path[0]
    const typing = ["INPUT", "SELECT", "TEXTAREA"].includes(target.tagName) || target.isContentEditable
    if (typing || event.ctrlKey || event.metaKey || event.altKey) return
    if (event.key === "?") { event.preventDefault(); sheet.togglePopover() }
    else if (/^[1-9]$/.test(event.key)) model.send_msg({ view: Number(event.key) })
    else if (event.key === "ArrowLeft" || event.key === "ArrowRight") {
      if (!path.some((element) => element.classList?.contains("bk-Figure"))) return
      event.preventDefault()
      model.send_msg({ steps: (event.key === "ArrowLeft" ? -1 : 1) * (event.shiftKey ? 10 : 1) })
    }
  }
  // Plots keep the size they have on the screen; the paper is told how wide that is. Texts and tables without a plot
  // beside them flow over as many pages as they need, in their whole width.
  const PAPER = [1030, 700]   // A4 landscape between its margins, CSS pixels
  function* seen(root) {
    for (const part of root.querySelectorAll("*")) {
      if (!part.checkVisibility()) continue
      yield part
      if (part.shadowRoot) yield* seen(part.shadowRoot)
    }
  }
  const onPrint = () => {
    const style = document.documentElement.style, parts = [...seen(document.querySelector("#main > .views"))]
    const flowing = !parts.some((part) => part.localName === "canvas")
    document.documentElement.toggleAttribute("data-flowing", flowing)
    const widths = flowing ? parts.map((part) => part.scrollWidth) : []
    const width = Math.max(document.querySelector("#main").clientWidth, ...widths)
    style.setProperty("--page-width", `${width}px`)
    const views = document.querySelector("#main > .views").clientHeight + 40
    style.setProperty("--views-height", flowing ? "auto" : `${views}px`)
    const height = document.querySelector("#main").scrollHeight + 200   // the bar, and one more row of readouts
    style.setProperty("--paper", Math.min(1, PAPER[0] / width, flowing ? 1 : PAPER[1] / height))
  }
  window.addEventListener("beforeprint", onPrint)
  document.addEventListener("keydown", onKey)
  model.on("remove", () => {
    document.removeEventListener("keydown", onKey)
    window.removeEventListener("beforeprint", onPrint)
  })
  return view
}
