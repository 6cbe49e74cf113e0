// What is measured in a page as it stands: contrast, names, landmarks, places to press, widths.
// Each function returns lists of plain sentences; empty lists are good. Left out: what is painted
// on a canvas, and pictures behind text (their faintest and strongest colours are not known here).
(() => {
  const shown = (element) => {
    if (!element.checkVisibility({ opacityProperty: true, visibilityProperty: true })) return false;
    const box = element.getBoundingClientRect();
    return box.width > 1 && box.height > 1;
  };

  const where = (element) => {
    const name = element.id ? `#${element.id}` : `.${[...element.classList].join(".")}`;
    const text = (element.textContent || element.value || "").trim().slice(0, 40);
    return `<${element.localName}${name === "." ? "" : name}> "${text}"`;
  };

  // Whatever CSS calls a colour, painted onto one pixel: red, green, blue, alpha of 0 to 1.
  const pixel = Object.assign(document.createElement("canvas"), { width: 1, height: 1 })
    .getContext("2d", { willReadFrequently: true });
  const known = new Map();
  const colour = (text) => {
    if (!known.has(text)) {
      pixel.clearRect(0, 0, 1, 1);
      pixel.fillStyle = text;
      pixel.fillRect(0, 0, 1, 1);
      const [red, green, blue, alpha] = pixel.getImageData(0, 0, 1, 1).data;
      known.set(text, [red, green, blue, alpha / 255]);
    }
    return known.get(text);
  };

  const over = ([r, g, b, alpha], ground) =>
    [r, g, b].map((part, i) => part * alpha + ground[i] * (1 - alpha));

  const canvasColour = () => {
    const probe = document.createElement("span");
    probe.style.color = "Canvas";
    probe.style.colorScheme = getComputedStyle(document.documentElement).colorScheme;
    document.documentElement.append(probe);
    const text = getComputedStyle(probe).color;
    probe.remove();
    return colour(text).slice(0, 3);
  };

  // The ground an element stands on: the backgrounds of all that hold it, from the window inwards.
  const ground = (element, canvas) => {
    const chain = [];
    for (let at = element; at; at = at.parentElement) chain.unshift(at);
    return chain.reduce((below, at) => {
      const style = getComputedStyle(at);
      const [r, g, b, alpha] = colour(style.backgroundColor);
      return over([r, g, b, alpha], below);
    }, canvas);
  };

  const opacity = (element) => {
    let share = 1;
    for (let at = element; at; at = at.parentElement) share *= Number(getComputedStyle(at).opacity);
    return share;
  };

  const turned = (element) => {
    for (let at = element; at; at = at.parentElement) {
      if (getComputedStyle(at).filter !== "none") return at;
    }
    return null;
  };

  // WCAG 2.2, "relative luminance" and "contrast ratio".
  const luminance = (rgb) => {
    const [r, g, b] = rgb.map((part) => {
      const share = part / 255;
      return share <= 0.04045 ? share / 12.92 : ((share + 0.055) / 1.055) ** 2.4;
    });
    return 0.2126 * r + 0.7152 * g + 0.0722 * b;
  };
  const contrast = (one, other) => {
    const [light, dark] = [luminance(one), luminance(other)].sort((a, b) => b - a);
    return (light + 0.05) / (dark + 0.05);
  };

  const inactive = (element) => element.closest(":disabled, [aria-disabled=true]") !== null;
  const NUMBER = /^[\s+\u2212-]*\d[\d\s.,]*$/;

  const drawnColour = (element, style) =>
    element instanceof SVGElement ? (style.fill === "none" ? style.stroke : style.fill) : style.color;

  const contrasts = (least, leastOfNumbers, within) => {
    const canvas = canvasColour();
    const faults = new Set();
    let looked = 0;
    const weigh = (element, text, paint) => {
      const filtered = turned(element);
      if (filtered) {
        faults.add(`turned by a filter, cannot be weighed: ${where(filtered)}`);
        return;
      }
      const below = ground(element, canvas);
      const [r, g, b, alpha] = colour(paint);
      const above = over([r, g, b, alpha * opacity(element)], below);
      const ratio = contrast(above, below);
      const need = NUMBER.test(text) ? leastOfNumbers : least;
      looked += 1;
      if (ratio < need - 0.005) faults.add(`${ratio.toFixed(2)} < ${need}: ${where(element)}`);
    };
    const walker = document.createTreeWalker(within || document.body, NodeFilter.SHOW_TEXT);
    while (walker.nextNode()) {
      const text = walker.currentNode.data.trim();
      const element = walker.currentNode.parentElement;
      if (!text || element.closest("script, style, noscript, option") || inactive(element)) continue;
      if (!shown(element)) continue;
      const style = getComputedStyle(element);
      weigh(element, text, drawnColour(element, style));
    }
    for (const field of document.querySelectorAll("input, textarea, select")) {
      if (!shown(field) || inactive(field)) continue;
      if (field.value) weigh(field, field.value, getComputedStyle(field).color);
      else if (field.placeholder) {
        weigh(field, field.placeholder, getComputedStyle(field, "::placeholder").color);
      }
    }
    return { looked, faults: [...faults] };
  };

  // WCAG 2.2, 1.4.11: where a field is must be seen, by its border or by its ground: 3 to 1.
  const fields = () => {
    const canvas = canvasColour();
    return [...document.querySelectorAll("input, textarea, select")]
      .filter((field) => shown(field) && !inactive(field))
      .filter((field) => !["checkbox", "radio", "range", "file"].includes(field.type))
      .filter((field) => {
        const style = getComputedStyle(field);
        const around = ground(field.parentElement, canvas);
        const line = parseFloat(style.borderBottomWidth) > 0
          ? contrast(over(colour(style.borderBottomColor), around), around) : 1;
        return Math.max(line, contrast(ground(field, canvas), around)) < 3;
      })
      .map(where);
  };

  // What Tab stops at; also what is seen only once it has the focus.
  const stops = () => [...document.querySelectorAll(
    "a[href], button, input, select, textarea, summary, [tabindex], [contenteditable]",
  )].filter((element) => element.checkVisibility({ visibilityProperty: true }) && !element.matches(":disabled") && element.tabIndex >= 0
    && element.type !== "hidden" && !element.closest("[inert]"));

  // WCAG 2.2, 2.5.8: 24 by 24 CSS pixels, or so much room around; words in a sentence are let off.
  const small = () => {
    return stops().filter(shown).filter((element) => {
      const box = element.getBoundingClientRect();
      if (box.width >= 23.5 && box.height >= 23.5) return false;
      if (getComputedStyle(element).display === "inline" && element.localName === "a") return false;
      const label = element.closest("label");
      if (label) {
        const around = label.getBoundingClientRect();
        if (around.width >= 23.5 && around.height >= 23.5) return false;
      }
      return true;
    }).map(where);
  };

  const order = () => {
    const groups = new Set();
    return stops().filter((element) => {
      // One of a group of radio buttons is reached by Tab, the others by arrows.
      if (element.type !== "radio") return true;
      const group = [...document.querySelectorAll(`input[type=radio][name="${element.name}"]`)];
      const first = group.find((one) => one.checked);
      if (first) return first === element;
      return !groups.has(element.name) && groups.add(element.name);
    });
  };

  // Going through a page by Tab: where the focus has been, and what it should have come to.
  let been = [];
  const begin = () => {
    document.activeElement?.blur();
    scrollTo(0, 0);
    been = [];
    return order().length;
  };
  const missed = () => order().filter((one, at) => been[at] !== one).map(where);

  // The ring around what has the focus: how wide, and its contrast with the ground beside it.
  const focused = () => {
    const element = document.activeElement;
    if (!element || element === document.body) return null;
    been.push(element);
    const style = getComputedStyle(element);
    const around = ground(element.parentElement, canvasColour());
    const box = element.getBoundingClientRect();
    return {
      where: where(element),
      width: style.outlineStyle === "none" ? 0 : parseFloat(style.outlineWidth),
      contrast: style.outlineStyle === "auto" ? 21
        : contrast(over(colour(style.outlineColor), around), around),
      within: box.bottom > 0 && box.top < innerHeight && box.right > 0 && box.left < innerWidth,
    };
  };

  const structure = () => {
    const faults = [];
    const count = (selector) =>
      [...document.querySelectorAll(selector)].filter((one) => one.checkVisibility()).length;
    if (!document.documentElement.lang) faults.push("no language is said");
    if (!document.title.trim()) faults.push("no title");
    if (count("main, [role=main]") !== 1) faults.push("not one main part");
    if (count("h1") !== 1) faults.push(`${count("h1")} headings of the first level`);
    if (document.querySelectorAll("[tabindex]").length) {
      for (const one of document.querySelectorAll("[tabindex]")) {
        if (one.tabIndex > 0) faults.push(`order of focus set by hand: ${where(one)}`);
      }
    }
    let level = 0;
    for (const one of document.querySelectorAll("h1, h2, h3, h4, h5, h6")) {
      if (!one.checkVisibility()) continue;
      const next = Number(one.localName[1]);
      if (next > level + 1) faults.push(`h${next} below h${level}: ${where(one)}`);
      level = next;
    }
    const ids = new Set();
    for (const one of document.querySelectorAll("[id]")) {
      if (ids.has(one.id)) faults.push(`two of id ${one.id}`);
      ids.add(one.id);
    }
    const pointing = ["aria-labelledby", "aria-describedby", "aria-controls", "aria-owns",
      "aria-activedescendant", "for", "list"];
    for (const name of pointing) {
      for (const one of document.querySelectorAll(`[${name}]`)) {
        for (const id of one.getAttribute(name).split(/\s+/).filter(Boolean)) {
          if (!ids.has(id)) faults.push(`${name} points nowhere: ${id}`);
        }
      }
    }
    for (const table of document.querySelectorAll("table")) {
      if (shown(table) && !table.querySelector("th")) faults.push(`no heads: ${where(table)}`);
    }
    for (const one of document.querySelectorAll("img:not([alt])")) faults.push(`no alt: ${where(one)}`);
    for (const one of document.querySelectorAll("canvas, svg")) {
      if (!shown(one) || one.closest("[aria-hidden=true], [role=img]:not(canvas):not(svg)")) continue;
      if (one.getAttribute("role") !== "img" || !(one.getAttribute("aria-label")
        || one.getAttribute("aria-labelledby"))) faults.push(`a drawing without a name: ${where(one)}`);
    }
    return faults;
  };

  // What sticks out of the window to the side; what scrolls in a box of its own is let off.
  const wide = () => {
    const most = document.documentElement.clientWidth;
    if (document.documentElement.scrollWidth <= most) return [];
    const sticking = [...document.body.querySelectorAll("*")].filter((one) => {
      if (one.getBoundingClientRect().right <= most + 1) return false;
      for (let at = one.parentElement; at && at !== document.body; at = at.parentElement) {
        if (getComputedStyle(at).overflowX !== "visible") return false;
      }
      return true;
    });
    return [`${document.documentElement.scrollWidth} wide on ${most}`,
      ...sticking.slice(0, 5).map(where)];
  };

  // Text that its own box cuts off.
  const cut = () => [...document.body.querySelectorAll("*")].filter((one) => {
    if (!shown(one) || ["html", "body", "textarea", "select"].includes(one.localName)) return false;
    const style = getComputedStyle(one);
    if (style.overflowX !== "hidden" && style.overflowX !== "clip") return false;
    return one.scrollWidth > one.clientWidth + 1 && one.innerText?.trim();
  }).map(where);

  return { contrasts, fields, small, begin, focused, missed, structure, wide, cut, contrast, colour };
})();
