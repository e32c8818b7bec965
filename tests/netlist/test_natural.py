from hypothesis import given
from hypothesis import strategies as st

from drc_power.netlist.natural import natural_key


def test_numbers_in_names_compare_as_numbers():
    names = ["R100", "R2", "R10", "C3", "r1", "+12V", "+3V3", "+5V", "U1", "Net-(D10-K)", "Net-(D9-K)"]
    expected = ["+3V3", "+5V", "+12V", "C3", "Net-(D9-K)", "Net-(D10-K)", "r1", "R2", "R10", "R100", "U1"]
    assert sorted(names, key=natural_key) == expected


@given(st.integers(0, 10**12), st.integers(0, 10**12))
def test_references_of_one_prefix_are_in_order_of_their_numbers(a, b):
    assert (natural_key(f"R{a}") < natural_key(f"R{b}")) == (a < b)


@given(st.text(), st.text())
def test_only_equal_texts_have_equal_keys(a, b):
    assert (natural_key(a) == natural_key(b)) == (a == b)
    assert (natural_key(a) < natural_key(b)) != (natural_key(b) <= natural_key(a))


def test_digits_without_end_are_no_trouble():
    assert natural_key("R" + "9" * 10_000) < natural_key("R1" + "0" * 10_000)
