"""Python text -> sites. The only package that knows libcst and ast; linted code is never imported or run."""
