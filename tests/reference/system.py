"""The system dx/dt of one cell and its sparse Jacobian.

Takes coefficients as given; owns what depends on the state: [M], ice layers, negative abundances.
"""

import numpy as np
from scipy.sparse import coo_matrix

from . import names, rates

COLLIDERS = ("H2", "H", "He")
TOP_LAYERS = {"thermal_desorption": "desorbing_layers", "cosmic_desorption": "desorbing_layers",
              "photodesorption": "lit_layers"}


def top_layers(n, layers):
    """Share of the ice in its top n layers, and the derivative by the number of layers."""
    return (1.0, 0.0) if layers <= n else (n / layers, -n / layers**2)


def encounters(n, layers):
    """min(1, n/L)^2/clamp(L, 1, n) and its derivative: only the top n layers react, per molecule in them."""
    depth = min(max(layers, 1.0), n)
    slope = 1.0 if 1.0 < layers < n else 0.0
    top, d_top = top_layers(n, layers)
    return top**2 / depth, 2.0 * top * d_top / depth - top**2 * slope / depth**2


class System:
    def __init__(self, case, network, cell, coefficients):
        self.names = network.species
        index = {name: i for i, name in enumerate(self.names)}
        self.size = len(self.names)
        self.total = index[names.ICE_TOTAL]
        self.colliders = [index[s] for s in COLLIDERS]
        self.fixed_colliders = case.colliders
        grains = case.grains
        self.sites = rates.sites(cell.dust_area, grains["site_density"])

        reactions = network.reactions
        count = len(reactions)
        self.k = np.array([c.value for c in coefficients])
        self.law = np.full((count, 3), self.size)  # the entry after the last species is 1
        stoichiometry = {}
        self.with_colliders, self.falloffs, groups = [], [], {}
        for r, (reaction, c) in enumerate(zip(reactions, coefficients)):
            for slot, name in enumerate(reaction.factors):
                self.law[r, slot] = index[name]
            change = [(name, -1) for name in reaction.consumed] + [(name, 1) for name in reaction.products]
            for name, sign in change:
                for row in (index[name], self.total if names.is_adsorbed(name) else None):
                    if row is not None:
                        stoichiometry[row, r] = stoichiometry.get((row, r), 0) + sign
            if "third_body" in (reaction.kind, reaction.extra.get("forward")):
                self.with_colliders.append(r)
            if c.low is not None:
                self.falloffs.append((r, c.low, c.high, c.log_centre))
            if reaction.kind in TOP_LAYERS:
                groups.setdefault((top_layers, float(grains[TOP_LAYERS[reaction.kind]])), []).append(r)
            if reaction.kind == "surface":
                groups.setdefault((encounters, float(grains["active_layers"])), []).append(r)
        rows, columns = zip(*stoichiometry)
        self.stoichiometry = coo_matrix((list(stoichiometry.values()), (rows, columns)), (self.size, count)).tocsr()
        self.layer_groups = [(law, n, np.array(rs)) for (law, n), rs in groups.items()]
        self.bodies = (self.law < self.size).sum(axis=1)

    def _flux_parts(self, x):
        """Coefficients with the state in them, their derivatives by [M]/n_H and by the ice, and the products."""
        factor = self.k.copy()
        by_m, by_ice = np.zeros_like(factor), np.zeros_like(factor)
        fixed = self.fixed_colliders is not None
        m = self.fixed_colliders if fixed else x[self.colliders].sum()
        for r in self.with_colliders:
            factor[r], by_m[r] = self.k[r] * m, 0.0 if fixed else self.k[r]
        for r, low, high, log_centre in self.falloffs:
            if high == 0.0:
                factor[r] = 0.0
                continue
            at = rates.falloff(low * m / high, high, log_centre)
            factor[r] = self.k[r] * at
            if not fixed:
                step = 1.0e-6 * m
                by_m[r] = self.k[r] * (rates.falloff(low * (m + step) / high, high, log_centre) - at) / step
        layers = x[self.total] / self.sites
        for law, n, rs in self.layer_groups:
            value, slope = law(n, layers)
            by_ice[rs] = factor[rs] * slope / self.sites
            factor[rs] = factor[rs] * value
        a = np.append(x, 1.0)[self.law]
        a[(a < 0.0).sum(axis=1) >= 2] = 0.0
        return factor, by_m, by_ice, a

    def rates(self, x):
        """Flux of every reaction, per n_H and second."""
        factor, _, _, a = self._flux_parts(x)
        return factor * a.prod(axis=1)

    def rhs(self, t, x):
        return self.stoichiometry @ self.rates(x)

    def jacobian(self, t, x):
        factor, by_m, by_ice, a = self._flux_parts(x)
        product = a.prod(axis=1)
        each = np.arange(len(factor))
        rows, columns, values = [], [], []
        for slot in range(3):
            others = a[:, [s for s in range(3) if s != slot]].prod(axis=1)
            rows.append(each), columns.append(self.law[:, slot]), values.append(factor * others)
        for r in [*self.with_colliders, *(f[0] for f in self.falloffs)]:
            for column in self.colliders:
                rows.append([r]), columns.append([column]), values.append([by_m[r] * product[r]])
        rows.append(each), columns.append(np.full(len(each), self.total)), values.append(by_ice * product)
        flux = coo_matrix((np.concatenate(values), (np.concatenate(rows), np.concatenate(columns))),
                          (len(each), self.size + 1)).tocsc()[:, : self.size]
        return (self.stoichiometry @ flux).tocsc()
