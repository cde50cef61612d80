"""The working: a formula's text -> its value and its printed step."""
