/** The demo's tables as CSV text (RFC 4180, line feeds). */

const RECORD_HEADER = 'station_id,station_name,lon,lat,elevation_m,month,precipitation_mm,d18O,d2H';
const SITE_HEADER = 'site_id,site_name,longitude,latitude,elevation_m';
const TRUTH_HEADER = 'site_id,elevation_m,d18O,d2H,dexcess';

export function recordTable(rows) {
  const lines = rows.map(({ station, month, precipMm, d18O, d2H }) =>
    [
      station.id,
      quote(station.name),
      fixed(station.lonDeg, 4),
      fixed(station.latDeg, 4),
      station.elevationM,
      month,
      fixed(precipMm, 1),
      fixed(d18O, 2),
      fixed(d2H, 1),
    ].join(','),
  );
  return `${[RECORD_HEADER, ...lines].join('\n')}\n`;
}

export function siteTable(sites) {
  const lines = sites.map((site) =>
    [
      site.id,
      quote(site.name),
      fixed(site.lonDeg, 4),
      fixed(site.latDeg, 4),
      site.elevationKnown ? site.elevationM : '',
    ].join(','),
  );
  return `${[SITE_HEADER, ...lines].join('\n')}\n`;
}

/** What no real user has: the expected long-term means at the sites. */
export function truthTable(sites, truths) {
  const lines = sites.map((site, k) => {
    const { d18O, d2H } = truths[k];
    return [site.id, site.elevationM, fixed(d18O, 4), fixed(d2H, 4), fixed(d2H - 8 * d18O, 4)].join(',');
  });
  return `${[TRUTH_HEADER, ...lines].join('\n')}\n`;
}

/** Empty where missing. */
function fixed(value, decimals) {
  return Number.isNaN(value) ? '' : value.toFixed(decimals);
}

function quote(text) {
  return /[",\n]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text;
}
