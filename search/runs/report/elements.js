// Elements of the page; every text goes in as text, never as markup.
const data = JSON.parse(document.getElementById("data").textContent);
const byId = (id) => document.getElementById(id);

function filled(element, attributes, children) {
  for (const [name, value] of Object.entries(attributes)) {
    if (name.startsWith("on")) element.addEventListener(name.slice(2), value);
    else if (value !== null && value !== undefined && value !== false) element.setAttribute(name, value === true ? "" : value);
  }
  element.append(...children.filter((child) => child !== null && child !== undefined));
  return element;
}
function made(tag, attributes = {}, ...children) {
  return filled(document.createElement(tag), attributes, children);
}
function drawn(tag, attributes = {}, ...children) {
  return filled(document.createElementNS("http://www.w3.org/2000/svg", tag), attributes, children);
}
