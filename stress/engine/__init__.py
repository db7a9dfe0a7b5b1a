"""Cases to answers: decks, ngspice, steady states, workers."""
