"""What the checks of one case found."""

from dataclasses import dataclass, field


@dataclass
class Report:
    """Counts what passed and keeps what failed: (check, expected, actual)."""

    passed: int = 0
    failures: list = field(default_factory=list)

    def check(self, good, what, expected, actual):
        """One comparison; true if it holds."""
        if good:
            self.passed += 1
        else:
            self.failures.append((what, str(expected), str(actual)))
        return bool(good)

    def equal(self, what, expected, actual):
        """One comparison of things that must be equal."""
        return self.check(expected == actual, what, expected, actual)
