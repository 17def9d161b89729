"""A plain step simulator for sequencers: one relay at a time, quick ones first."""

from __future__ import annotations


class Sequencer:
    """Columns, coils and timing, and where they stand."""

    def __init__(self, columns, drives, slow, state):
        self.columns = columns
        self.drives = drives  # name -> function of {name: 0 or 1}
        self.slow = slow  # set of (name, "operate" or "release")
        self.at = dict(zip(columns, state, strict=True))

    def state(self):
        return tuple(self.at[name] for name in self.columns)

    def pending(self):
        """Relays that are about to move, only the quick ones if there are any."""
        due = [n for n, drive in self.drives.items() if bool(drive(self.at)) != bool(self.at[n])]
        quick = [n for n in due if (n, "release" if self.at[n] else "operate") not in self.slow]
        return quick or due

    def step(self, choose=min):
        """Move one relay; False if all are at rest."""
        due = self.pending()
        if due:
            self.turn(choose(due))
        return bool(due)

    def turn(self, name):
        self.at[name] = 1 - self.at[name]


def from_targets(targets, columns, free):
    """Drives that keep to truth tables, with the free rows filled in from `free`."""

    def drive(name):
        on, may = targets[name].on, targets[name].free

        def fed(at):
            row = sum(at[c] << i for i, c in enumerate(columns))
            return (free[name] if may >> row & 1 else on) >> row & 1

        return fed

    return {name: drive(name) for name in targets}
