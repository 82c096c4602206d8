"""Where a key stands in a TOML file: path of keys -> line number.

Knows TOML's syntax through tree-sitter; does not know what the keys mean. Used only once a place is asked for.
"""

import tomllib

from tree_sitter import Language, Node, Parser

Path = tuple[str | int, ...]


def lines_of(text: str) -> dict[Path, int]:
    """Return the line (from 1) of every table, key and array element of a TOML text by its path.

    Args:
        text: a file's content that TOML can read; tables of an array are counted from 0.
    """
    import tree_sitter_toml

    root = Parser(Language(tree_sitter_toml.language())).parse(text.encode()).root_node
    found: dict[Path, int] = {}
    counts: dict[Path, int] = {}
    for node in root.named_children:
        if node.type == "pair":
            _pair(node, (), found)
            continue
        if node.type not in ("table", "table_array_element"):
            continue
        keys = _keys(node.named_children[0])
        path = _with_counts(keys, counts)
        if node.type == "table_array_element":
            found.setdefault(path, node.start_point.row + 1)
            counts[path] = counts.get(path, -1) + 1
            for deeper in [known for known in counts if len(known) > len(path) and known[: len(path)] == path]:
                del counts[deeper]
            path = (*path, counts[path])
        _note(path, 0, node, found)
        for child in node.named_children[1:]:
            if child.type == "pair":
                _pair(child, path, found)
    return found


def _with_counts(keys: Path, counts: dict[Path, int]) -> Path:
    """Return a header's path with the current element's number after each array of tables it passes through."""
    path: Path = ()
    for position, key in enumerate(keys):
        path = (*path, key)
        if path in counts and position < len(keys) - 1:
            path = (*path, counts[path])
    return path


def _note(path: Path, above: int, node: Node, found: dict[Path, int]) -> None:
    """Note a path's line, and that of the tables it opens on its way, unless they stand further up."""
    for end in range(above + 1, len(path)):
        found.setdefault(path[:end], node.start_point.row + 1)
    found[path] = node.start_point.row + 1


def _pair(pair: Node, above: Path, found: dict[Path, int]) -> None:
    """Note a key's line, and those inside its inline tables and arrays, however deep."""
    waiting: list[tuple[Node, Path]] = [(pair, above)]
    while waiting:
        node, path = waiting.pop()
        if node.type == "pair":
            above, path = path, (*path, *_keys(node.named_children[0]))
            _note(path, len(above), node, found)
            node = node.named_children[-1]
        children = [child for child in node.named_children if child.type != "comment"]
        if node.type == "inline_table":
            waiting += [(child, path) for child in children if child.type == "pair"]
        elif node.type == "array":
            for number, child in enumerate(children):
                found[(*path, number)] = child.start_point.row + 1
                waiting.append((child, (*path, number)))


def _keys(node: Node) -> Path:
    """Return the words of a bare, quoted or dotted key, as TOML reads them."""
    assert node.text is not None
    inner = tomllib.loads(f"{node.text.decode()} = 0")
    words: list[str] = []
    while isinstance(inner, dict):
        ((word, inner),) = inner.items()
        words.append(word)
    return tuple(words)
