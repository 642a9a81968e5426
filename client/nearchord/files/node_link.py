"""Node-link JSON: {"nodes": [{"id": ..., "weight": ...}, ...], "links": [{"source": ..., "target": ...}, ...]}.

The list of edges may be called `links` or `edges`. Ids are the names of the vertices as text; directions are ignored.
"""

from __future__ import annotations

import json
from decimal import Decimal
from typing import Any, NoReturn

from nearchord.errors import BadInput
from nearchord.files import assemble
from nearchord.files.document import Document
from nearchord.files.number import weight_from
from nearchord.graph import Graph


def read(document: Document, scale: int) -> Graph:
    """The graph of a document; FileProblem names the line or the element that is wrong. Time O(bytes + m log m)."""
    content = _parsed(document)
    nodes, (key, links) = _list(document, content, "nodes"), _links(document, content)
    numbers: dict[str, int] = {}
    given: dict[int, int] = {}
    for place, node in enumerate(nodes):
        name = _name(document, f"nodes[{place}]", node, "id")
        if name in numbers:
            raise document.problem(
                None, f"nodes[{place}] has the id of nodes[{numbers[name]}]", "give every node its own"
            )
        numbers[name] = place
        if node.get("weight") is not None:
            given[place] = _weight(document, f"nodes[{place}]", node["weight"], scale)
    edges = assemble.distinct_edges(*assemble.columns(_ends(document, key, links, numbers)))
    weights = assemble.spread(given, len(numbers), scale)
    notices = ["the directions of the edges are ignored"] if content.get("directed") and links else []
    return assemble.build(document, len(numbers), edges, weights, list(numbers), notices)


def _parsed(document: Document) -> dict[str, Any]:
    def refuse(word: str) -> NoReturn:
        raise document.problem(None, f"the number {word} is not JSON", "write finite numbers only")

    try:
        content = json.loads(document.data, parse_float=Decimal, parse_constant=refuse)
    except json.JSONDecodeError as wrong:
        raise document.problem(wrong.lineno, f"the JSON is broken ({wrong.msg})", "export the file again") from None
    except BadInput:
        raise
    except (ValueError, RecursionError) as wrong:
        raise document.problem(None, f"the JSON cannot be taken ({wrong})", "export the file again") from None
    if not isinstance(content, dict):
        raise document.problem(None, "the JSON is no object", 'write {"nodes": [...], "links": [...]}')
    return content


def _list(document: Document, content: dict[str, Any], key: str) -> list[Any]:
    if not isinstance(content.get(key), list):
        raise document.problem(None, f"there is no list {key!r}", 'write {"nodes": [...], "links": [...]}')
    found: list[Any] = content[key]
    return found


def _links(document: Document, content: dict[str, Any]) -> tuple[str, list[Any]]:
    if "links" in content and "edges" in content:
        raise document.problem(None, "there are both 'links' and 'edges'", "keep one of the two lists")
    key = "edges" if "edges" in content else "links"
    return key, _list(document, content, key)


def _ends(document: Document, key: str, links: list[Any], numbers: dict[str, int]) -> list[int]:
    ends: list[int] = []
    for place, link in enumerate(links):
        for field in ("source", "target"):
            name = _name(document, f"{key}[{place}]", link, field)
            if name not in numbers:
                raise document.problem(None, f"{key}[{place}].{field} is {name!r}, which is no node", "add the node")
            ends.append(numbers[name])
    return ends


def _name(document: Document, place: str, thing: Any, field: str) -> str:
    if not isinstance(thing, dict) or field not in thing:
        raise document.problem(None, f"{place} has no {field!r}", f"give it one: {{{field!r}: ...}}".replace("'", '"'))
    name = _text(thing[field])
    if not name or not name.isprintable():
        raise document.problem(None, f"{place}.{field} is {name!r}", "give non-empty text without control characters")
    return name


def _text(value: Any) -> str:
    """The name of an id; lists stand for the tuples that JSON has not."""
    return value if isinstance(value, str) else str(_tuple(value))


def _tuple(value: Any) -> Any:
    return tuple(_tuple(item) for item in value) if isinstance(value, list) else value


def _weight(document: Document, place: str, value: Any, scale: int) -> int:
    try:
        return weight_from(str(value).lower() if isinstance(value, Decimal) else str(value), scale)
    except BadInput as wrong:
        raise document.problem(None, f"{place}: {wrong.problem}", wrong.remedy) from None
