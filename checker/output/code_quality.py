"""Write the open findings as the code-quality report that GitLab reads: one JSON array."""

from __future__ import annotations

import json
from collections.abc import Mapping

from checker.finding import Card, Level, Verdict
from checker.output.alerts import alerts, path_from_root
from checker.result.model import FleetResult

SEVERITIES = {Level.ERROR: "critical", Level.WARNING: "minor", Level.NOTE: "info"}


def code_quality_report(result: FleetResult, cards: Mapping[str, Card], prefix: str) -> str:
    """Return the report; what was accepted or not assessed is not in it, since the format has no word for either."""
    rows = [
        {
            "description": f"{alert.sentence} (on {alert.on})" if alert.on else alert.sentence,
            "check_name": cards[alert.first.check].id,
            "fingerprint": alert.identity,
            "severity": SEVERITIES[alert.level],
            "location": {
                "path": path_from_root(alert.at.file, prefix),
                "lines": {"begin": alert.at.line},
            },
        }
        for alert in alerts(result, Verdict.FINDING)
    ]
    return json.dumps(rows, ensure_ascii=False, indent=1) + "\n"
