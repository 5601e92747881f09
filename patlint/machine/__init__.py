"""Tree -> program -> automata, and what can be asked of them."""
