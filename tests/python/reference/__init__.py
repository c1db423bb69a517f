"""An independent reference: the exact answer to a question, to more than a thousand digits.

It reads the same JSON question as the service and answers it from textbook formulas:
J. D. Jackson, Classical Electrodynamics, 3rd ed., ch. 11 (eqs. 11.98, 11.137, 11.149; numbers
from memory), and L. D. Landau and E. M. Lifshitz, The Classical Theory of Fields, §§ 6, 24, 25.
Nothing here is taken from the service's code, and nothing is arranged for speed.
"""

from .question import solve

__all__ = ["solve"]
