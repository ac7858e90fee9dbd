"""A name that nothing declares: `unknown-name` hands on what was met."""


def test_mistakes_of_this_name_fail_and_no_others(make):
    make.only_mistakes("unknown-name")
