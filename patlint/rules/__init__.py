"""One file a rule: a pure function from a site to findings, with its documentation and its evidence."""

from patlint.rules.check import Checked, check_site
from patlint.rules.finding import Finding, Rule
from patlint.rules.registry import RULES

__all__ = ["RULES", "Checked", "Finding", "Rule", "check_site"]
