"""The conditions of a channel: resolution, clipping, stuck stretches, repeats, serial dependence, drift, gaps.

They decide which null distribution a channel is held against. Everything is found from the readings in row order and
the same readings sorted, for all channels of a block at once.
"""

from screener.stats.conditions.conditions import Conditions, find_conditions
from screener.stats.conditions.serial import autocorrelation
from screener.stats.conditions.words import WORDS, conditions_of, words_of

__all__ = ["WORDS", "Conditions", "autocorrelation", "conditions_of", "find_conditions", "words_of"]
