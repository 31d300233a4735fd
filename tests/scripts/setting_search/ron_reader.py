"""A reader of RON (Rusty Object Notation) for the files of this project: enough for machines, no more."""
import re

TOKEN = re.compile(r'\s+|//[^\n]*|(?P<text>"[^"\\]*")|(?P<number>[-+]?\d+(?:\.\d+)?(?:[eE][-+]?\d+)?)|(?P<word>\w+)|(?P<mark>[()\[\]:,])')


def read_ron(source):
    """Structs and enum variants as dictionaries, tuples and lists as lists; Some(x) as x, None as None."""
    tokens, at = [], 0
    while at < len(source):
        match = TOKEN.match(source, at)
        if match is None:
            raise ValueError(f'cannot read {source[at:at + 20]!r}')
        if match.lastgroup:
            tokens.append((match.lastgroup, match.group()))
        at = match.end()
    value, end = value_at(tokens, 0)
    if end != len(tokens):
        raise ValueError(f'left over: {tokens[end:end + 3]}')
    return value


def value_at(tokens, i):
    kind, text = tokens[i]
    if kind == 'text':
        return text[1:-1], i + 1
    if kind == 'number':
        return float(text), i + 1
    if kind == 'word':
        if text in ('true', 'false', 'None'):
            return {'true': True, 'false': False, 'None': None}[text], i + 1
        if i + 1 < len(tokens) and tokens[i + 1][1] == '(':
            inside, end = elements_at(tokens, i + 1, ')')
            return (inside[0] if text == 'Some' else {text: inside}), end
        return text, i + 1
    return elements_at(tokens, i, {'(': ')', '[': ']'}[text])


def elements_at(tokens, i, close):
    named, listed = {}, []
    i += 1
    while tokens[i][1] != close:
        if tokens[i][0] == 'word' and tokens[i + 1][1] == ':':
            named[tokens[i][1]], i = value_at(tokens, i + 2)
        else:
            value, i = value_at(tokens, i)
            listed.append(value)
        if tokens[i][1] == ',':
            i += 1
    return (named or listed), i + 1
