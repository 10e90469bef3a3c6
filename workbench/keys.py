"""Content keys: the same content gives the same key on every machine."""

import hashlib
import json


def content_key(content):
    """16 hex digits that name plain content: numbers, texts, booleans, None, and lists and tables of them.

    Numbers are compared by value, so 1, 1.0 and, for zero, -0.0 give one key.
    """
    text = json.dumps(plain(content), sort_keys=True, separators=(",", ":"), ensure_ascii=True)
    return hashlib.sha256(text.encode("ascii")).hexdigest()[:16]


def plain(content):
    """The content with every number as the shortest text that reads back to it."""
    if isinstance(content, bool) or content is None:
        return content
    if isinstance(content, int):
        return f"{content}"
    if isinstance(content, float):
        return f"{int(content)}" if content.is_integer() else repr(content)
    if isinstance(content, str):
        return ["text", content]
    if isinstance(content, dict):
        return {str(name): plain(value) for name, value in content.items()}
    return ["list", *(plain(value) for value in content)]
