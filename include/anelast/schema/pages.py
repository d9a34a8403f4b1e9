#!/usr/bin/python3
"""pages.py [--check]: the format pages of the documents, made from the schemas beside this file.

Writes formats.md; with --check writes nothing and exits with 1 where formats.md is not what the schemas say.
Standard library only.
"""
import pathlib
import sys
import textwrap
import xml.etree.ElementTree as ElementTree

XS = "{http://www.w3.org/2001/XMLSchema}"
FOLDER = pathlib.Path(__file__).resolve().parent
WRITTEN = ["layout", "specimen", "apparatus", "procedure"]  # by people
MADE = ["run", "points", "grid", "master", "material"]      # by programs, in the order of the line
PARTS = ["common", "assessment", "fit"]                     # shared by several documents


def said(node, kind):
    """Documentation or example of an annotated node, "" where there is none."""
    found = node.find(f"{XS}annotation/{XS}{kind}")
    return "" if found is None or not found.text else found.text.strip()


def sentence(node):
    return " ".join(said(node, "documentation").split())


def attributes(node):
    """Names of the attributes, each with its type; `name!` where it has to be there."""
    names = []
    for attribute in node.iter(XS + "attribute"):
        name, kind = attribute.get("name"), attribute.get("type", "")
        if name:
            names.append(f"`{name}`{'' if attribute.get('use') != 'required' else '!'}{' ' + kind if kind else ''}")
    return ", ".join(names)


def own_attributes(element):
    """The element's own attributes, not those of the elements inside it."""
    names = []
    for kind in element.findall(f"{XS}complexType"):
        for holder in [kind, *kind.findall(f"{XS}simpleContent/{XS}extension"), *kind.findall(f"{XS}complexContent/{XS}extension")]:
            for attribute in holder.findall(XS + "attribute"):
                name, type_ = attribute.get("name"), attribute.get("type", "")
                must = "!" if attribute.get("use") == "required" else ""
                names.append(f"`{name}`{must}{' ' + type_ if type_ else ''}")
    if element.get("type"):
        names.append(f"as {element.get('type')}")
    return ", ".join(names)


def children(element):
    """Elements that stand directly inside: declared here or referred to."""
    found = []

    def walk(node):
        for child in node:
            if child.tag == XS + "element":
                found.append(child)
            elif child.tag != XS + "annotation":
                walk(child)

    walk(element)
    return found


def count_of(element):
    least, most = element.get("minOccurs", "1"), element.get("maxOccurs", "1")
    if most == "unbounded":
        return "any number" if least == "0" else "one or more"
    return "may stand" if least == "0" else ""


def listing(element, depth):
    """The element and what stands inside it as nested list items."""
    lines = []
    indent = "  " * depth
    name = element.get("name") or element.get("ref")
    facts = [fact for fact in (count_of(element), own_attributes(element)) if fact]
    text = f"{indent}- **{name}**" + (f" ({'; '.join(facts)})" if facts else "")
    if element.get("ref"):
        text += ": see the shared parts."
    elif sentence(element):
        text += ": " + sentence(element)
    lines += textwrap.wrap(text, 118, subsequent_indent=indent + "  ", break_long_words=False, break_on_hyphens=False)
    for child in children(element):
        lines += listing(child, depth + 1)
    return lines


def section(name):
    root = ElementTree.parse(FOLDER / f"{name}.xsd").getroot()
    lines = [f"## {name}", ""]
    for declared in root:
        if declared.tag in (XS + "simpleType", XS + "complexType", XS + "attributeGroup", XS + "group"):
            kind = declared.tag[len(XS):].replace("Type", " type").replace("Group", " group")
            names = attributes(declared)
            text = f"- {kind} **{declared.get('name')}**" + (f" ({names})" if names else "")
            text += (": " + sentence(declared)) if sentence(declared) else ""
            lines += textwrap.wrap(text, 118, subsequent_indent="  ", break_long_words=False, break_on_hyphens=False)
    if lines[-1]:
        lines.append("")
    for declared in root.findall(XS + "element"):
        lines += listing(declared, 0)
        example = said(declared, "appinfo")
        if example:
            lines += ["", "```xml", example, "```", ""]
    return lines + ([""] if lines[-1] else [])


def page():
    lines = ["# The documents", "",
             "Made from the schemas in this folder by `pages.py`; a test fails where the two differ. `!` marks an attribute that has",
             "to be there; `as X` means the attributes and content of type X. Namespace `urn:x-anelast:documents:1`, SI values, standard",
             "uncertainties (k = 1).", ""]
    for title, names in (("Written by people", WRITTEN), ("Made by programs", MADE), ("Shared parts", PARTS)):
        lines += [f"# {title}", ""]
        for name in names:
            lines += section(name)
    return "\n".join(lines).rstrip() + "\n"


if __name__ == "__main__":
    every = {path.stem for path in FOLDER.glob("*.xsd")}
    if every != set(WRITTEN + MADE + PARTS):
        sys.exit(f"pages.py: schemas and the lists in pages.py differ: {sorted(every ^ set(WRITTEN + MADE + PARTS))}")
    if sys.argv[1:] == ["--check"]:
        if (FOLDER / "formats.md").read_text(encoding="utf-8") != page():
            sys.exit("formats.md is not what the schemas say; run include/anelast/schema/pages.py")
    else:
        (FOLDER / "formats.md").write_text(page(), encoding="utf-8")
