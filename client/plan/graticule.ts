import L from 'leaflet';

/** Meridians and parallels with their degrees: where one is when there is no basemap. */
export class Graticule extends L.Layer {
  readonly canvas = L.DomUtil.create('canvas', 'leaflet-zoom-hide');

  override onAdd(map: L.Map): this {
    map.getPanes().tilePane.appendChild(this.canvas);
    map.on('moveend zoomend resize viewreset', this.#draw, this);
    this.#draw();
    return this;
  }

  override onRemove(map: L.Map): this {
    this.canvas.remove();
    map.off('moveend zoomend resize viewreset', this.#draw, this);
    return this;
  }

  #draw(): void {
    const map = (this as unknown as { _map: L.Map })._map;
    const size = map.getSize();
    const ratio = devicePixelRatio || 1;
    const canvas = this.canvas;
    canvas.width = size.x * ratio;
    canvas.height = size.y * ratio;
    canvas.style.width = `${String(size.x)}px`;
    canvas.style.height = `${String(size.y)}px`;
    L.DomUtil.setPosition(canvas, map.containerPointToLayerPoint([0, 0]));
    const context = canvas.getContext('2d')!;
    context.setTransform(ratio, 0, 0, ratio, 0, 0);
    const style = getComputedStyle(document.documentElement);
    context.strokeStyle = style.getPropertyValue('--line');
    context.fillStyle = style.getPropertyValue('--ink-3');
    context.font = '11px system-ui, sans-serif';
    context.lineWidth = 1;
    const bounds = map.getBounds();
    const step = stepFor((bounds.getEast() - bounds.getWest()) / Math.max(2, size.x / 190));
    const decimals = Math.max(0, Math.ceil(-Math.log10(step)));
    for (let lon = Math.ceil(bounds.getWest() / step) * step; lon <= bounds.getEast(); lon += step) {
      const { x } = map.latLngToContainerPoint([bounds.getCenter().lat, lon]);
      line(context, x, 0, x, size.y);
      const shown = ((((lon + 180) % 360) + 360) % 360) - 180;
      context.fillText(`${Math.abs(shown).toFixed(decimals)}° ${shown < 0 ? 'W' : 'E'}`, x + 3, size.y - 30);
    }
    for (let lat = Math.ceil(bounds.getSouth() / step) * step; lat <= bounds.getNorth(); lat += step) {
      const { y } = map.latLngToContainerPoint([lat, bounds.getCenter().lng]);
      line(context, 0, y, size.x, y);
      context.fillText(`${Math.abs(lat).toFixed(decimals)}° ${lat < 0 ? 'S' : 'N'}`, 48, y - 3);
    }
  }
}

function line(context: CanvasRenderingContext2D, x0: number, y0: number, x1: number, y1: number): void {
  context.beginPath();
  context.moveTo(x0, y0);
  context.lineTo(x1, y1);
  context.stroke();
}

function stepFor(raw: number): number {
  const power = 10 ** Math.floor(Math.log10(Math.max(raw, 1e-6)));
  const lead = raw / power;
  return power * (lead <= 1 ? 1 : lead <= 2 ? 2 : lead <= 5 ? 5 : 10);
}
