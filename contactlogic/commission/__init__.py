"""Commissioning: the fewest rows to set that show every fault of a panel."""

from contactlogic.commission.plan import Look, Step, TestPlan, Unseen, plan_test

__all__ = ["Look", "Step", "TestPlan", "Unseen", "plan_test"]
