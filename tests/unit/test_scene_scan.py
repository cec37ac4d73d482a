"""Every key that tomllib finds has the line on which it stands."""

import tomllib

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from lumentrace.scene.scan import scan


def routes(data, route=()):
    """Every key and every array element of parsed data, with its key where it has one."""
    if isinstance(data, dict):
        for key, value in data.items():
            yield (*route, key), key
            yield from routes(value, (*route, key))
    elif isinstance(data, list):
        for index, value in enumerate(data):
            yield (*route, index), None
            yield from routes(value, (*route, index))


def below(data, route):
    """Whether the route leads somewhere in parsed data."""
    for step in route:
        try:
            data = data[step]
        except (KeyError, IndexError, TypeError):
            return False
    return True


STATEMENTS = [
    *("[a]", "[b]", "[a.b]", "[a.b.c]", "[ a . 'b' ]", '["a"."b c"]', "[b.a]"),
    *("[[a]]", "[[b]]", "[[a.b]]", "[[a.b.c]]", "[[ b . a ]]", "[[a]] # [[b]]"),
    *("a = 1", "b = 2", "c = 'x = 1'", "a.b = 1", "a.c = 2", "a.b.c = 3", "b . a = 4"),
    *('"a" = 5', "'b' = 6", r'"\u0061" = 7', r'"b c" = "\"# [a]"', "1.2 = 3", "a-b = 1979-05-27"),
    *("a = [1, [2, 3], {b = 4}]", "b = [{a = 1}, {a = 2, c.b = 3}]", "c = {a.b = 1, b = {}}"),
    *("a = []", "b = [ ]", "c = {}", 'a = """x = 1"""', "b = '''[a]'''", 'c = """"a"""""'),
    *("", "# a = 1", "   # [b]", "\t", "a = true # b = 1", "b = 1979-05-27 07:32:00"),
]


@settings(max_examples=400, deadline=None, derandomize=True)
@given(st.lists(st.sampled_from(STATEMENTS), max_size=9))
def test_line_is_the_first_after_which_tomllib_knows_the_key(lines):
    # A head is complete only with what came before; the oracle parses the file line by line.
    try:
        data = tomllib.loads("\n".join(lines))
    except tomllib.TOMLDecodeError:
        assume(False)
    positions = scan("\n".join(lines))
    assert positions.repeated is None
    grown = [tomllib.loads("\n".join(lines[:n])) for n in range(len(lines) + 1)]
    for route, _ in routes(data):
        first = next(n for n, part in enumerate(grown) if below(part, route))
        assert positions.lines[route] == first, route


MISLEADING = ["[x]", "y = 1", '# "', "'", "[[z]]", "}", "]", "{", "a = [", "\\\\", ","]


@st.composite
def documents(draw):
    """The text of a TOML file in many styles; each key holds its own number."""
    number = 0

    def new_key():
        nonlocal number
        number += 1
        style = draw(st.integers(0, 4))
        plain = f"k{number}_"
        if style == 0:
            return f'"{plain}.\\" #"'
        if style == 1:
            return f"'{plain} = ['"
        if style == 2:
            return f'"\\u006b{number}_\\t"'
        return plain

    def blank(newlines):
        if not newlines:
            return draw(st.sampled_from(["", " ", "\t "]))
        comment = f" # {draw(st.sampled_from(MISLEADING))}\n"
        return draw(st.sampled_from(["", " ", "\n", "\n\n  ", comment]))

    def text():
        inside = "\n".join(draw(st.lists(st.sampled_from(MISLEADING), max_size=3)))
        escaped = inside.replace('"', '\\"')
        literal = inside.replace("'", "")
        one_line = [f'"{escaped}"'.replace("\n", " "), f"'{literal}'".replace("\n", " ")]
        many = [f'"""{escaped}\\""""', f"'''\n{literal}''''", '""""x"""""', '""', "''"]
        return draw(st.sampled_from(one_line + many))

    def value(depth):
        kind = draw(st.integers(0, 5 if depth else 2))
        if kind <= 1:
            scalars = ["1", "-2.5e3", "true", "inf", "1979-05-27T07:32:00Z", "07:32:00", "0x1f"]
            return draw(st.sampled_from(scalars))
        if kind == 2:
            return text()
        count = draw(st.integers(0, 3))
        if kind == 3:
            pairs = [
                f"{blank(False)}{new_key()}{blank(False)}={blank(False)}{value(depth - 1)}"
                for _ in range(count)
            ]
            return "{" + f"{blank(False)},".join(pairs) + blank(False) + "}"
        items = [f"{blank(True)}{value(depth - 1)}{blank(True)}" for _ in range(count)]
        comma = "," if items and draw(st.booleans()) else ""
        return "[" + ",".join(items) + comma + blank(True) + "]"

    def body():
        lines = []
        for _ in range(draw(st.integers(0, 3))):
            dotted = f"{blank(False)}.{blank(False)}".join(
                new_key() for _ in range(draw(st.integers(1, 3)))
            )
            lines.append(f"{blank(False)}{dotted}{blank(False)}= {value(2)}{blank(False)}")
            lines.append(draw(st.sampled_from(["", "# [c]", "\t"])))
        return lines

    lines = body()
    heads = [""]
    for _ in range(draw(st.integers(0, 4))):
        prefix = draw(st.sampled_from(heads))
        head = f"{prefix}{new_key()}"
        copies = draw(st.integers(0, 2))
        if copies == 0:
            lines += [f"[ {head} ] # [d]", *body()]
        for _ in range(copies):
            lines += [f"[[{head}]]", *body()]
        heads = [*heads, f"{head} . "] if prefix == "" or copies == 0 else heads
    return draw(st.sampled_from(["\n", "\r\n"])).join(lines)


@settings(max_examples=250, deadline=None, derandomize=True)
@given(documents())
def test_the_key_stands_on_its_line(text):
    data = tomllib.loads(text)
    text = text.replace("\r\n", "\n")
    positions = scan(text)
    lines = text.split("\n")
    assert positions.repeated is None
    for route, key in routes(data):
        line = lines[positions.lines[route] - 1]
        if key is not None:
            number = key.split("_")[0].removeprefix("k")
            assert f"k{number}_" in line or f"\\u006b{number}_" in line, route


@pytest.mark.parametrize(
    ("text", "repeated"),
    [
        ("a = 1\nb = 2\na = 3", (("a",), 3)),
        ("[a]\n[b]\n[a]", (("a",), 3)),
        ("[[a]]\n[a]", (("a",), 2)),
        ("[a]\n[[a]]", (("a",), 2)),
        ("x = {a = 1, a = 2}", (("x", "a"), 1)),
        ("[[a]]\nb = 1\n[[a]]\nb = 1", None),
        ("[a.b]\n[a]", None),
    ],
)
def test_what_stands_twice(text, repeated):
    assert scan(text).repeated == repeated


@given(st.text(alphabet="ab=[]{}\",.\n #'\\1é\x00", max_size=40))
@settings(max_examples=300, deadline=None, derandomize=True)
def test_any_text_is_scanned_without_an_error(text):
    lines = scan(text).lines
    assert all(1 <= line <= text.count("\n") + 1 for line in lines.values())
