"""The argument behind an answer: why, why not, how far it holds, which assumption matters."""
