"""Bondwright: checks the joints of built-up members from the shop's own tested values."""

ENGINE = "bondwright 0.1.0"
