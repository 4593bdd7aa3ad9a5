# Outside witness of: how sure a forecast is: a grid over the airway dead space, at each point one Kalman filter for
# x = ln(K*VCO2/(1 - f)), and a mixture of two normals for the next PaCO2.
# Published: Kalman 1960 (scalar, random walk), Bayes' rule on a grid; the figures are the project's own fit.
# The Monte-Carlo mode does not use the filter: it draws the dead space from its continuous prior and weighs it by the
# joint normal density of all the gases, then draws the next gas.

import math
from dataclasses import dataclass

import numpy as np
from scipy.optimize import brentq
from scipy.special import ndtr

TWICE = ((0.5, 0.5), (0.5, math.sqrt(1.75)))  # weight, spread in S


@dataclass
class Steadiness:
    gas: float = 0.12
    wander: float = 0.03  # per square root of an hour
    change: float = 0.45


USUAL = Steadiness()
SETTLED = Steadiness(0.03, 0.04, 0.15)


@dataclass
class Heard:
    """One gas as the belief hears it."""

    paco2: float
    rate: float
    vt: float
    apparatus: float
    hours: float
    fresh: float  # alveolar ventilation with the section-1 dead space, any unit
    unsettled: float = 0.0  # added variance


@dataclass
class Next:
    rate: float
    vt: float
    apparatus: float
    fresh: float
    disagreement: float  # ln(P_volume/P_fraction), or 1
    shift: float = 0.0


class Belief:
    def __init__(self, mean, spread, gases, steadiness, cells=201):
        self.mean, self.spread, self.gases, self.steadiness = max(0.0, mean), spread, gases, steadiness
        self.low = max(0.0, self.mean - 4.0 * spread)
        self.high = min(self.mean + 4.0 * spread, 0.95 * min(g.vt - g.apparatus for g in gases))
        if self.high <= self.low:
            self.low = 0.0
        self.airway = self.low + (np.arange(cells) + 0.5) * (self.high - self.low) / cells
        log_weight = -0.5 * ((self.airway - self.mean) / spread) ** 2
        self.x, self.var = None, None
        for before, gas in zip([None, *gases], gases):
            y = math.log(gas.paco2) + np.log(gas.rate * (gas.vt - gas.apparatus - self.airway))
            noise = steadiness.gas**2 + gas.unsettled
            if before is None:
                self.x, self.var = y, noise
                continue
            prior = self.var + self.growth(before, gas)
            total = prior + noise
            miss = y - self.x
            log_weight = log_weight - 0.5 * miss**2 / total - 0.5 * math.log(total)
            gain = prior / total
            self.x, self.var = self.x + gain * miss, prior * (1.0 - gain)
        weight = np.exp(log_weight - log_weight.max())
        self.weight = weight / weight.sum()

    def growth(self, before, gas):
        s = self.steadiness
        return s.wander**2 * (gas.hours - before.hours) + (s.change * math.log(gas.fresh / before.fresh)) ** 2

    def posterior_airway(self):
        return float(self.weight @ self.airway)

    def step_variance(self, trial):
        """What S squared adds to Var(x)."""
        s, last = self.steadiness, self.gases[-1]
        return (
            s.wander**2
            + s.gas**2
            + (s.change * math.log(trial.fresh / last.fresh)) ** 2
            + (0.25 * trial.disagreement) ** 2
        )

    def spread_of(self, trial):
        return Spread(self, trial)

    def draws(self, trial, count, seed=1):
        """ln PaCO2 drawn without the grid or the filter."""
        dice = np.random.default_rng(seed)
        gases, s = self.gases, self.steadiness
        airway = dice.normal(self.mean, self.spread, 6 * count)
        airway = airway[(airway > self.low) & (airway < self.high)][:count]
        y = np.array([math.log(g.paco2) + np.log(g.rate * (g.vt - g.apparatus - airway)) for g in gases])
        walk = np.cumsum([0.0] + [self.growth(a, b) for a, b in zip(gases, gases[1:])])
        noise = np.diag([s.gas**2 + g.unsettled for g in gases])
        cov = np.minimum.outer(walk, walk) + noise
        inverse = np.linalg.inv(cov)
        ones = np.ones(len(gases))
        information = ones @ inverse @ ones
        level = ones @ inverse @ y / information  # x at the first gas, flat prior
        rest = y - level
        log_weight = -0.5 * np.einsum("ij,ik,kj->j", rest, inverse, rest)
        # x at the last gas: level plus the regression of the walk on what is left over.
        cross = np.minimum(walk, walk[-1])
        last = level + cross @ inverse @ rest
        var = walk[-1] - cross @ inverse @ cross + (1.0 - cross @ inverse @ ones) ** 2 / information
        weight = np.exp(log_weight - log_weight.max())
        picked = dice.choice(len(airway), size=count, p=weight / weight.sum())
        room = trial.vt - trial.apparatus - airway[picked]
        big_s = math.sqrt(var + self.step_variance(trial))
        wide = np.where(dice.random(count) < 0.5, TWICE[0][1], TWICE[1][1])
        with np.errstate(divide="ignore", invalid="ignore"):
            centre = np.where(room > 0, last[picked] - np.log(np.where(room > 0, trial.rate * room, 1.0)), np.inf)
        return centre + trial.shift + big_s * wide * dice.standard_normal(count)


class Spread:
    """The forecast distribution of ln PaCO2."""

    def __init__(self, belief, trial):
        room = trial.vt - trial.apparatus - belief.airway
        usable = room > 0
        self.weight = belief.weight[usable]
        self.centre = belief.x[usable] - np.log(trial.rate * room[usable]) + trial.shift
        self.s = math.sqrt(belief.var + belief.step_variance(trial))

    def below(self, log_paco2):
        total = 0.0
        for share, wide in TWICE:
            total += share * float(self.weight @ ndtr((log_paco2 - self.centre) / (self.s * wide)))
        return total

    def quantile(self, share):
        """mmHg; None when it lies where no gas passes the dead space."""
        if len(self.weight) == 0 or float(self.weight.sum()) <= share:
            return None
        low = float(self.centre.min()) - 12.0 * self.s
        high = float(self.centre.max()) + 12.0 * self.s
        while self.below(high) <= share:
            high += 12.0 * self.s
            if high > 1e4:
                return None
        return math.exp(brentq(lambda v: self.below(v) - share, low, high, xtol=1e-14, rtol=8.9e-16, maxiter=500))

    def chance(self, low, high):
        return self.below(math.log(high)) - (self.below(math.log(low)) if low > 0 else 0.0)
