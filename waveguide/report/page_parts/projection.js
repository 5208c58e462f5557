// Plane coordinates of positions: Miller's cylinder about a meridian, or the stereographic plane
// about a pole. Both in degrees of the equator or of the pole, x to the right and y up.

const RADIAN = 180 / Math.PI;

function wrapped(degrees) {
  return ((degrees + 180) % 360 + 360) % 360 - 180;
}

class Projection {
  constructor(middle, pole) {
    this.middle = middle;
    this.pole = pole;
    this.turns = pole ? [0] : [-360, 0, 360];  // a cylinder goes on beyond its seam
  }

  // East is counted from the middle and may run past 180 along a line that does.
  place(east, lat) {
    if (!this.pole) {
      return [east, 1.25 * RADIAN * Math.log(Math.tan(Math.PI / 4 + 0.4 * lat / RADIAN))];
    }
    const away = Math.min(90 - this.pole * lat, 120) / RADIAN;
    const radius = 2 * RADIAN * Math.tan(away / 2);
    const angle = east / RADIAN;
    return [radius * Math.sin(angle), -this.pole * radius * Math.cos(angle)];
  }

  point(lon, lat) {
    return this.place(wrapped(lon - this.middle), lat);
  }

  // Plane coordinates along a line, without a jump at the seam.
  line(lon, lat) {
    const x = new Float64Array(lon.length), y = new Float64Array(lon.length);
    let east = wrapped(lon[0] - this.middle);
    for (let i = 0; i < lon.length; i++) {
      if (i > 0) east += wrapped(lon[i] - lon[i - 1]);
      [x[i], y[i]] = this.place(east, lat[i]);
    }
    return { x, y };
  }
}

// Land and lakes as two paths in plane coordinates.
function landPaths(projection, land) {
  const paths = [new Path2D(), new Path2D()];
  for (const ring of land.rings) {
    const lon = [], lat = [];
    let x = 0, y = 0;
    for (let i = 1; i < ring.length; i += 2) {
      x += ring[i]; y += ring[i + 1];
      lon.push(x / land.units); lat.push(y / land.units);
    }
    if (projection.pole && !lat.some((value) => projection.pole * value > 0)) continue;
    addRing(paths[ring[0]], projection, lon, lat);
  }
  return paths;
}

function addRing(path, projection, lon, lat) {
  const line = projection.line(lon, lat);
  path.moveTo(line.x[0], line.y[0]);
  for (let i = 1; i < lon.length; i++) path.lineTo(line.x[i], line.y[i]);
  path.closePath();
}

// Meridians and parallels every so many degrees, as one path.
function graticule(projection, step) {
  const path = new Path2D();
  const add = (lon, lat) => {
    const line = projection.line(lon, lat);
    path.moveTo(line.x[0], line.y[0]);
    for (let i = 1; i < lon.length; i++) path.lineTo(line.x[i], line.y[i]);
  };
  const middle = projection.middle;
  const south = projection.pole > 0 ? 10 : -80, north = projection.pole < 0 ? -10 : 80;
  for (let lon = -180; lon < 180; lon += step) {
    const lats = [];
    for (let lat = south; lat <= north; lat += 2) lats.push(lat);
    add(lats.map(() => lon), lats);
  }
  for (let lat = -80; lat <= 80; lat += step) {
    if (lat < south || lat > north) continue;
    const lons = [];
    for (let east = -180; east <= 180; east += 4) lons.push(middle + Math.min(east, 179.999));
    add(lons, lons.map(() => lat));
  }
  return path;
}
