"""A mass with dry friction under held efforts, solved from event to event.

    J·v' + b·v = u − F(v)      y' = v
    moving:   F = Fc·sign(v) + Fv·v
    at rest:  F = u while |u| ≤ Fs; |u| > Fs: it breaks loose towards u, and F is Fc at once

Each stretch of one direction is linear, with β = b + Fv, w = (u ∓ Fc)/β:

    v(t) = w + (v0 − w)·e^(−βt/J)      y(t) = y0 + w·t + (v0 − w)·(1 − e^(−βt/J))·J/β
    v(t) = 0 at t = (J/β)·ln((w − v0)/w)
    β = 0:  v = v0 + a·t, y = y0 + v0·t + a·t²/2, v = 0 at −v0/a, a = (u ∓ Fc)/J
"""
from mpmath import mp, mpf

from kept import clear, num


class Mass:
    """State y, v, from rest at 0, and what happens to it; log of events and of the stretches."""

    def __init__(self, spec, v=0):
        self.J, self.fc, self.fs = num(spec["J"]), num(spec["coulomb"]), num(spec["static"])
        self.beta = num(spec["b"]) + num(spec["viscous"])
        self.y, self.v, self.t = mpf(0), mpf(v), mpf(0)
        self.going = int(mp.sign(v))  # −1, 0, 1
        self.events, self.pieces = [], []

    def at(self, u, t):
        """y, v after t seconds in the present direction."""
        force = u - self.going * self.fc
        if self.beta == 0:
            a = force / self.J
            return self.y + self.v * t + a * t * t / 2, self.v + a * t
        w = force / self.beta
        fall = -mp.expm1(-self.beta * t / self.J)  # 1 − e^(−βt/J)
        return self.y + w * t + (self.v - w) * fall * self.J / self.beta, self.v + (w - self.v) * fall

    def stops_after(self, u):
        force = u - self.going * self.fc
        if self.going * force >= 0:
            return mp.inf
        if self.beta == 0:
            return -self.v * self.J / force
        return self.J / self.beta * mp.log1p(-self.v * self.beta / force)

    def release(self, u):
        """At rest: break loose or stay; tells whether it moves."""
        if self.fs > 0 or u != 0:
            clear(abs(u) - self.fs, "effort at the break-away force")
        self.going = int(mp.sign(u)) if abs(u) > self.fs else 0
        return self.going != 0

    def hold(self, u, span):
        """Effort u for span seconds."""
        if self.going == 0:
            if not self.release(u):
                self.t += span
                return
            self.events.append([self.t, "break", self.y])
        end = self.t + span
        while self.going != 0:
            left = end - self.t
            stop = self.stops_after(u)
            clear(stop / left - 1, "stop at the end of a stretch")
            step = min(stop, left)
            self.pieces.append((self.v, self.going, u, step))
            self.y, self.v = self.at(u, step)
            self.t += step
            if stop > left:
                return
            self.v = mpf(0)
            self.events.append([self.t, "reverse" if self.release(u) else "stop", self.y])
        self.t = end
