"""Socket circuits drawn at random with one fault each, and the readings a meter would show of them.

Built on networkx alone and importing nothing of the product, so that the product is scored by other physics than its
own. ``python -m tests.simulator --n 1000`` prints the score of every fault.
"""
