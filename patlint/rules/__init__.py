"""One file a rule: a pure function from a site to findings, with its documentation and its evidence."""
