"""Words in a brief: plain Markdown, no markup of their own, and nothing to do on paper."""

import pytest

from app.brief.markup import markdown, still

RIGHT_TO_LEFT = "\u202e"


@pytest.mark.parametrize(
    ("words", "made"),
    [
        ("# A\n\nB **c**", "<h3>A</h3>\n<p>B <strong>c</strong></p>"),
        ("<b>x</b>", "<p>&lt;b&gt;x&lt;/b&gt;</p>"),
        ("[x](javascript:alert(1))", "<p>[x](javascript:alert(1))</p>"),
        ("[x](data:text/html,1)", "<p>[x](data:text/html,1)</p>"),
        ("![alt](https://h.example/p.png)", "<p>[alt]</p>"),
        (
            "[x](https://h.example/)",
            '<p><a href="https://h.example/" rel="noopener noreferrer nofollow">x</a></p>',
        ),
        (f"a{RIGHT_TO_LEFT}b", "<p>ab</p>"),
    ],
)
def test_markdown_becomes_plain_html(words, made):
    assert markdown(words).strip() == made


@pytest.mark.parametrize(
    ("said", "kept"),
    [
        ("The 8 of 19 that matter most. Choose one to see it.", "The 8 of 19 that matter most."),
        ("Left out: Food; choose others in the table.", "Left out: Food."),
        ("A holds its season. It can be taken out here: choose so above.", "A holds its season."),
        ("Cut by 1.5 %. Choose components in the table.", "Cut by 1.5 %."),
        ("Choose up to 6 responses for X.", ""),
        ("Chosen anew at 1.5; the test that chooses them does.", None),
    ],
)
def test_sentences_on_what_to_do_are_left_out(said, kept):
    assert still(said) == (said if kept is None else kept)
