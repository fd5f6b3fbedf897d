from dataclasses import replace

from axicfd.output.notebook import html
from tests.output.made_up import TEXT, made_up


def test_the_headline_is_a_table():
    text = html(made_up())
    assert "<table>" in text
    assert "outlet temperature (bulk)" in text and "56.20 degC" in text
    assert "the flow still changes at the outlet" in text
    assert "±0.05 (mesh)" in text
    assert "NOT CONVERGED" not in text


def test_words_of_users_are_escaped():
    text = html(made_up(TEXT.replace("Syrup line in", "<script>alert(1)</script> &")))
    assert "<script>" not in text
    assert "&lt;script&gt;" in text


def test_what_did_not_converge_says_so():
    assert "NOT CONVERGED" in html(made_up(converged=False))


def test_limits_and_reasons_are_shown():
    limits = '[limits]\n"stream.syrup.outlet_temperature" = { below = "60 degC" }\n'
    result = made_up(TEXT + limits)
    verdict = {"value_K": 329.35, "below_K": 333.15, "margin_K": 3.8, "half_width_K": 0.05, "verdict": "pass"}
    accepted = [{**result.summary["cautions"][0], "accepted": "seen & noted"}]
    more = {"limits": {"stream.syrup.outlet_temperature": verdict}, "cautions": accepted}
    text = html(replace(result, summary={**result.summary, **more}))
    assert "outlet temperature (bulk) below 60 degC: pass, margin 3.8 K (mesh ±0.05 K)" in text
    assert "Accepted: seen &amp; noted" in text
