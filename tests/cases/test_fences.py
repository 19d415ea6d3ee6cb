"""Which fences are ours, which are left alone, and where each block stands."""

import pytest

from bandbook.cases.fences import WORDS, Block, Prose, kind_of, misspelt, split

STUDY = '```toml study\nquestion = "bands"\n```\n'


def blocks(text: str) -> list[tuple[str, int, str]]:
    parts, problems = split(text, 1)
    assert problems == []
    return [(part.kind, part.line, part.source) for part in parts if isinstance(part, Block)]


def test_prose_and_blocks_stand_in_file_order_with_their_lines() -> None:
    parts, problems = split("one\n\n" + STUDY + "\ntwo\n~~~python workings\nx = 1\n~~~\nthree", 10)
    assert problems == []
    assert parts == [
        Prose("one\n", 10),
        Block("study", 12, 'question = "bands"\n'),
        Prose("\ntwo", 15),
        Block("workings", 17, "x = 1\n"),
        Prose("three", 20),
    ]


@pytest.mark.parametrize("fence", ["```", "````", "~~~", "~~~~~"])
@pytest.mark.parametrize("info", WORDS)
def test_each_kind_opens_with_backquotes_or_tildes(fence: str, info: str) -> None:
    assert blocks(f"{fence}{info}\na = 1\n{fence}\n") == [(WORDS[info], 1, "a = 1\n")]
    assert blocks(f"{fence} {info}  with more words\na = 1\n{fence}{fence[0]}  \n") == [(WORDS[info], 1, "a = 1\n")]


def test_a_block_may_hold_shorter_and_other_fences() -> None:
    assert blocks("````toml study\n```\n~~~~\n````\n") == [("study", 1, "```\n~~~~\n")]


@pytest.mark.parametrize(
    "text",
    [
        "````markdown\n" + STUDY + "````\n",
        "~~~markdown\n" + STUDY + "~~~\n",
        "```toml\na = 1\n```\n",
        "```python\nx = 1\n```\n",
        "```toml settings\na = 1\n```\n",
        "```python listing\nx = 1\n```\n",
        "```\nplain\n```\n",
        "``` `code` ```\n",
        "- item\n\n  ```text\n  x\n  ```\n",
        "- ```text\n  ```\n",
        "1. ```text\n   x\n   ```\n",
        "> ```text\n> x\n> ```\n",
        "    ```text\n    x\n    ```\n",
        "    ``` no fence, and nothing closes it\n",
        "<!--\n" + STUDY + "-->\n",
        "<!-- one line -->\n",
    ],
)
def test_other_fences_are_left_alone(text: str) -> None:
    parts, problems = split(text, 1)
    assert problems == []
    assert parts == [Prose(text, 1)]
    assert blocks(text + STUDY) == [("study", text.count("\n") + 1, 'question = "bands"\n')]


def test_an_open_comment_hides_the_rest() -> None:
    assert blocks("<!--\n" + STUDY) == []


def test_the_indentation_of_a_fence_is_taken_off_its_lines() -> None:
    assert blocks("  ```python workings\n  if x:\n      y\n z\n  ```\n") == [("workings", 1, "if x:\n    y\nz\n")]


def test_a_block_that_is_not_closed_ends_where_the_next_begins() -> None:
    parts, problems = split("```toml system\na = 1\n\n" + STUDY, 1)
    assert [(part.kind, part.line, part.is_broken) for part in parts if isinstance(part, Block)] == [
        ("system", 1, True),
        ("study", 4, False),
    ]
    assert [(problem.line, problem.found) for problem in problems] == [(1, 'the fence "toml system" is not closed')]


@pytest.mark.parametrize(
    ("info", "kind"),
    [
        ("toml sytem", "system"), ("toml systems", "system"), ("TOML system", "system"), ("tml system", "system"),
        ("toml studies", "study"), ("toml Study", "study"), ("study", "study"), ("toml-study", "study"), ("tomlstudy", "study"),
        ("{.toml .study}", "study"), ("study toml", "study"), ("toml refrence", "reference"), ("toml record", "recorded"),
        ("py workings", "workings"), ("python3 workings", "workings"), ("python working", "workings"), ("toml workings", "workings"),
        ("python system", "system"),
    ],
)  # fmt: skip
def test_nearly_ours_is_told(info: str, kind: str) -> None:
    found = misspelt(info)
    assert found is not None
    assert found[0] == kind
    right = next(words for words in WORDS if WORDS[words] == kind)
    assert found[1].remedy == f'did you mean "{right}"?'


@pytest.mark.parametrize(
    "info",
    ["", "toml", "python", "text", "toml settings", "python listing", "json schema", "text reference", "c++", "yaml"],
)
def test_not_ours_is_not_told(info: str) -> None:
    assert misspelt(info) is None
    assert kind_of(info) is None


def test_the_line_of_a_key_is_that_of_its_longest_known_beginning() -> None:
    block = Block("study", 3, "", lines={("changes",): 5, ("changes", 1): 7})
    assert block.line_of(("changes", 1, "alpha")) == 7
    assert block.line_of(("changes", 0)) == 5
    assert block.line_of(("cells",)) == 3
    assert block.line_of(()) == 3
