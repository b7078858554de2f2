/**
 * Whether `check` found the planted mistakes and named their places.
 *
 * @param planted what plantErrors says it planted
 * @param issues  the issues of `check --json`: { reasonCode, stationId, line, message }
 * @returns one { mistake, found } a mistake, `found` being the issue's own words, or null
 */
export function plantedFound(planted, issues) {
  const { swappedStationId, slippedDecimal, duplicateIds } = planted;
  const wanted = [
    [`${swappedStationId}: longitude and latitude changed places`, swappedStationId, ['coordinates-swapped']],
    [
      `${slippedDecimal.stationId} in ${slippedDecimal.month}: δ18O ${slippedDecimal.d18O.toFixed(2)}, a decimal point slipped`,
      slippedDecimal.stationId,
      ['d18O-impossible', 'd-excess-impossible'],
    ],
    [`${duplicateIds[1]}: ${duplicateIds[0]} again under another id`, duplicateIds[1], ['place-shared']],
  ];
  return wanted.map(([mistake, stationId, reasons]) => {
    const issue = issues.find((each) => each.stationId === stationId && reasons.includes(each.reasonCode));
    return {
      mistake,
      found: issue === undefined ? null : `line ${issue.line}, ${issue.reasonCode}: ${issue.message}`,
    };
  });
}
