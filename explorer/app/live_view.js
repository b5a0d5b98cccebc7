// Keeps the page to a tree of plain data (see live_view.py) and reports what the user does.
// Every text goes in as text: nothing here reads markup.

const TAGS = new Set(["div", "section", "span", "p", "h2", "h3", "h4", "ol", "ul", "li", "label", "button", "input",
  "select", "option", "optgroup", "textarea", "table", "caption", "colgroup", "col", "thead", "tbody", "tfoot", "tr", "th", "td",
  "strong", "small", "details", "summary"])
const ATTRIBUTE = /^(class|id|title|type|role|tabindex|placeholder|min|max|step|disabled|hidden|list|for|label|selected|scope|colspan|rowspan|open|accept|rows|spellcheck|autocomplete|inputmode|maxlength|size|autofocus|popover|popovertarget|aria-[a-z]+|data-[a-z]+)$/

const LARGEST_FILE = 1_000_000   // bytes of a text file; of a larger one only the name is told
const PATIENCE_MS = 1000   // an unanswered report holds back the next no longer than this

export function render({ model, el }) {
  const view = document.createElement("div")
  view.className = "live-view"
  let order = []      // elements in reading order: a patch addresses them by position
  let sent = 0, heard = 0, sentAt = 0   // number of the last report, and of the last that Python had heard when it answered

  const scope = () => view.getRootNode()
  const tell = (element, value) => {
    element._report = ++sent
    sentAt = performance.now()
    model.send_msg({ key: element._key, value: value ?? null, number: sent })
  }

  const waiting = new Map()   // slider -> newest value, not sent yet

  // ---- tree -> page ------------------------------------------------------------------------------

  function setValue(element, value) {
    if (element.type === "checkbox") return
    const text = value ?? ""
    if (element.tagName === "INPUT" && element.type !== "range") {
      const typing = scope().activeElement === element && element.value !== element._known
      element._known = text
      if (typing && element._sent !== element.value) return
      element._sent = null
      const selected = scope().activeElement === element
      element.value = text
      if (selected) element.select()
    } else if (element.type === "range" && (waiting.has(element) || (element._report ?? 0) > heard)) {
      return   // an answer to an earlier position: the slider is further by now
    } else {
      element.value = text
      paint(element)
    }
  }

  function paint(slider) {
    if (slider.type !== "range") return
    const low = Number(slider.min), high = Number(slider.max)
    const part = high > low ? (Number(slider.value) - low) / (high - low) : 0
    slider.style.setProperty("--filled", `${100 * Math.min(1, Math.max(0, part))}%`)
  }

  function setProperty(element, name, value) {
    if (name === "text") element.textContent = value ?? ""
    else if (name === "checked") element.checked = Boolean(value)
    else if (name === "colour") element.style.setProperty("--colour", value ?? "")
    else if (name.startsWith("--")) element.style.setProperty(name, value ?? "")
    else if (name === "value") element._late = value ?? ""
    else if (!ATTRIBUTE.test(name)) console.warn(`attribute ${name} is not shown`)
    else if (value === null || value === undefined) element.removeAttribute(name)
    else element.setAttribute(name, value === true ? "" : value)
  }

  function finish(element) {      // the value last: options and limits have to be there first
    if ("_late" in element) { setValue(element, element._late); delete element._late }
    else paint(element)
  }

  function dress(element, properties) {
    for (const name of Object.keys(element._properties))
      if (!(name in properties)) setProperty(element, name, null)
    for (const [name, value] of Object.entries(properties))
      if (element._properties[name] !== value || name === "checked" || name === "value") setProperty(element, name, value)
    element._properties = { ...properties }
  }

  function fit(parent, specs) {
    const old = new Map(), seen = new Map()
    const nameOf = (tag, key, count) => {
      if (key) return `${tag} ${key}`
      const number = count.get(tag) ?? 0
      count.set(tag, number + 1)
      return `${tag}#${number}`
    }
    const before = new Map()
    for (const child of [...parent.children]) old.set(nameOf(child._tag, child._key, before), child)
    let place = parent.firstElementChild
    for (const [tag, key, properties, children] of specs) {
      const name = nameOf(tag, key, seen)
      let child = old.get(name)
      old.delete(name)
      const fresh = !child
      if (fresh) {
        child = document.createElement(TAGS.has(tag) ? tag : "span")
        Object.assign(child, { _tag: tag, _key: key, _properties: {} })
      }
      if (child === place) place = place.nextElementSibling
      else parent.insertBefore(child, place)
      order.push(child)
      // Text and children exclude each other; a node that changes from one to the other starts empty.
      if (children.length && child._properties.text !== undefined) child.textContent = ""
      dress(child, properties)
      if (properties.text === undefined) fit(child, children)
      finish(child)
      if (fresh && properties.autofocus !== undefined && !child.closest("[popover]"))
        queueMicrotask(() => { child.focus(); child.select?.() })
      if (fresh && "data-reveal" in properties)
        requestAnimationFrame(() => child.scrollIntoView({ block: "nearest" }))
    }
    for (const child of old.values()) child.remove()
  }

  function showTree() {
    const focused = scope().activeElement?._key
    letGo()
    order = []
    const tree = JSON.parse(model.tree)
    heard = tree.heard ?? heard
    fit(view, tree.root ? [tree.root] : [])
    if (focused && scope().activeElement?._key !== focused)
      order.find((element) => element._key === focused)?.focus()
  }

  function showPatch() {
    const patch = JSON.parse(model.patch)
    heard = patch.heard ?? heard
    for (const [position, properties] of Object.entries(patch.changes ?? {})) {
      const element = order[Number(position)]
      if (!element) continue
      for (const [name, value] of Object.entries(properties)) {
        const same = element._properties[name] === value
        if (same && name !== "value" && name !== "checked") continue
        if (value === null) delete element._properties[name]
        else element._properties[name] = value
        setProperty(element, name, value)
      }
      finish(element)
    }
    if (waiting.size) requestAnimationFrame(flush)
  }

  // ---- page -> Python ----------------------------------------------------------------------------

  view.addEventListener("input", (event) => {
    const element = event.target
    if (element.hasAttribute("data-filter")) return filter(element)
    if (element.type !== "range") return
    paint(element)
    waiting.set(element, element.value)
    requestAnimationFrame(flush)
  })

  // One position at a time is under way: the next leaves when the last is answered, so a busy page or server
  // never builds up a queue, and a drag ends where the handle is let go.
  function flush() {
    if (heard < sent && performance.now() - sentAt < PATIENCE_MS) {
      if (waiting.size) setTimeout(flush, PATIENCE_MS)
      return
    }
    for (const [element, value] of waiting) {
      waiting.delete(element)
      tell(element, Number(value))
    }
  }
  view.addEventListener("change", (event) => {
    const element = event.target
    if (!element.hasAttribute("data-on") || element.type === "range") return
    if (element.type === "checkbox") return tell(element, element.checked)
    if (element.type === "file") return tellFile(element)
    element._sent = element.value
    tell(element, element.value)
  })
  // What is pasted into a text area is read at once, without leaving it first.
  view.addEventListener("paste", ({ target }) => {
    if (target.tagName === "TEXTAREA" && target.hasAttribute("data-on")) setTimeout(() => tell(target, target.value))
  })
  async function tellFile(chooser) {
    const file = chooser.files[0]
    chooser.value = ""     // the same file can be chosen again
    if (file) tell(chooser, { name: file.name, text: file.size > LARGEST_FILE ? null : await file.text() })
  }
  view.addEventListener("click", (event) => {
    const button = event.target.closest("button")
    if (!button) return
    const sheet = button.closest("[popover]")
    if (button.hasAttribute("data-on")) tell(button)
    if (sheet && !button.hasAttribute("popovertarget") && !button.hasAttribute("data-stays")) sheet.hidePopover()
  })

  // ---- dragging an item of a list to another place -------------------------------------------------

  let letGo = () => {}   // puts everything back where the list has it

  view.addEventListener("pointerdown", (event) => {
    const grip = event.target.closest("[data-grip]")
    if (!grip || event.button !== 0) return
    event.preventDefault()
    letGo()
    const moved = grip.parentElement
    const items = [...moved.parentElement.children].filter((item) => item.querySelector(":scope > [data-grip]"))
    const places = items.map((item) => item.getBoundingClientRect())
    const from = items.indexOf(moved), start = event.clientY
    const room = (places[from + 1]?.top ?? places[from].bottom) - places[from].top
    let to = from
    const follow = ({ clientY }) => {
      const by = clientY - start   // the leading edge passes the middle of an item that makes room
      const edge = (at) => (at < from ? places[from].top : places[from].bottom) + by
      to = places.filter((place, at) => at !== from && place.top + place.height / 2 < edge(at)).length
      items.forEach((item, at) => {
        const aside = at > from && at <= to ? -room : at < from && at >= to ? room : 0
        item.style.transform = `translateY(${item === moved ? by : aside}px)`
      })
    }
    const stop = () => {
      grip.removeEventListener("pointermove", follow)
      grip.removeEventListener("pointerup", drop)
      grip.removeEventListener("pointercancel", letGo)
      window.removeEventListener("keydown", escape)
    }
    const drop = () => {
      stop()
      if (to === from) return letGo()
      tell(grip, to - from)
      setTimeout(letGo, PATIENCE_MS)   // a refused move brings no new list
    }
    const escape = (pressed) => { if (pressed.key === "Escape") letGo() }
    letGo = () => {
      stop()
      moved.removeAttribute("data-moving")
      for (const item of items) item.style.transform = ""
      letGo = () => {}
    }
    moved.setAttribute("data-moving", "")
    grip.setPointerCapture(event.pointerId)
    grip.addEventListener("pointermove", follow)
    grip.addEventListener("pointerup", drop)
    grip.addEventListener("pointercancel", letGo)
    window.addEventListener("keydown", escape)
  })

  // ---- keys, menus and searchable lists ----------------------------------------------------------

  view.addEventListener("keydown", (event) => {
    const element = event.target
    const sheet = element.closest("[popover]")
    if (event.key === "Escape" && element.tagName === "INPUT" && !sheet && element._known !== undefined) {
      element.value = element._known
      element.select()
    }
    // A field that asks for a name: Enter takes what stands there already, Escape takes back the question.
    if (element.hasAttribute("data-asks") && (event.key === "Escape" || (event.key === "Enter" && element.value === element._known)))
      tell(element, event.key === "Enter" ? element.value : null)
    if (element.getAttribute("role") === "tab") {
      const tabs = [...element.parentElement.querySelectorAll("[role=tab]")], at = tabs.indexOf(element)
      const to = { ArrowRight: (at + 1) % tabs.length, ArrowLeft: at - 1, Home: 0, End: -1 }[event.key]
      if (to === undefined) return
      event.preventDefault()
      tabs.at(to).focus()
      tabs.at(to).click()
    }
    if (!sheet) return
    const choices = [...sheet.querySelectorAll("button")].filter((button) => button.checkVisibility())
    choices.sort((one, other) => one.getBoundingClientRect().top - other.getBoundingClientRect().top)
    const at = choices.indexOf(element)
    const step = { ArrowDown: 1, ArrowUp: -1 }[event.key]
    if (step && choices.length) {
      event.preventDefault()
      choices[(at + step + choices.length + (at < 0 && step < 0 ? 1 : 0)) % choices.length].focus()
    } else if (event.key === "Enter" && element.hasAttribute("data-filter")) {
      event.preventDefault()
      choices[0]?.click()
    }
  })

  function filter(search) {
    const words = search.value.toLowerCase().split(/\s+/).filter(Boolean)
    const sheet = search.closest("[popover], [data-filtered]")
    for (const choice of sheet.querySelectorAll("[data-words]")) {
      const own = choice.dataset.words || choice.textContent.toLowerCase()
      choice.hidden = !words.every((word) => own.includes(word))
      choice.style.order = words.length && own.startsWith(words[0]) ? 0 : 1
    }
    for (const group of sheet.querySelectorAll("[data-group]")) {
      group.hidden = !group.querySelector("[data-words]:not([hidden])")
      if (group.tagName === "DETAILS") unfold(group, words.length > 0)
    }
    for (const none of sheet.querySelectorAll("[data-none]"))
      none.hidden = Boolean(sheet.querySelector("[data-words]:not([hidden])"))
  }

  // A folded part is open while something is looked for in it, and afterwards as it was before.
  function unfold(part, looking) {
    if (looking) {
      part._before ??= part.open
      part.open = true
    } else if (part._before !== undefined) {
      part.open = part._before
      delete part._before
    }
  }

  view.addEventListener("beforetoggle", (event) => {
    const search = event.newState === "open" ? event.target.querySelector("[data-filter]") : null
    if (search) { search.value = ""; filter(search) }
  }, true)

  const GAP = 4, TALLEST = 460
  view.addEventListener("toggle", (event) => {
    const sheet = event.target
    const opener = [...view.querySelectorAll("[popovertarget]")].find((b) => b.getAttribute("popovertarget") === sheet.id)
    opener?.setAttribute("aria-expanded", String(event.newState === "open"))
    delete sheet.dataset.placed
    sheet.style.maxHeight = ""
    if (event.newState !== "open" || !opener) return
    const from = opener.getBoundingClientRect(), size = sheet.getBoundingClientRect()
    const below = window.innerHeight - from.bottom - 2 * GAP, above = from.top - 2 * GAP
    const wanted = Math.min(size.height, TALLEST)
    const up = wanted > below && above > below
    const height = Math.min(TALLEST, Math.max(120, up ? above : below))   // it may get longer while it is open
    const pixels = (length) => `${length / (sheet.currentCSSZoom ?? 1)}px`   // measured on the screen, set inside of the zoom
    sheet.style.maxHeight = pixels(height)
    // Held at the side of its button, so that a list that gets shorter stays there.
    sheet.style.top = up ? "auto" : pixels(from.bottom + GAP)
    sheet.style.bottom = up ? pixels(window.innerHeight - from.top + GAP) : "auto"
    const left = sheet.dataset.side === "left" ? from.left : from.right - size.width
    sheet.style.left = pixels(Math.min(Math.max(GAP, left), window.innerWidth - size.width - GAP))
    sheet.dataset.placed = ""
    // A search field takes the focus by itself when its sheet opens, before this: typing may have begun.
    if (!sheet.querySelector("[data-filter]")) sheet.querySelector("button")?.focus()
  }, true)

  model.on("tree", showTree)
  model.on("patch", showPatch)
  queueMicrotask(() => { showTree(); showPatch() })
  return view
}
