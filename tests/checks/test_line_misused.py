"""A line set or expected against what it is: `line-misused` hands on what was met."""


def test_mistakes_of_this_name_fail_and_no_others(make):
    make.only_mistakes("line-misused")
