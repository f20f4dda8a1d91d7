/** Menus are details elements: a press elsewhere or Escape closes them. Returns how to stop. */
export function closeMenusOutside(): () => void {
  const openMenus = () => document.querySelectorAll<HTMLDetailsElement>('details.menu[open]');
  const press = (event: PointerEvent) => {
    for (const menu of openMenus()) if (!menu.contains(event.target as Node)) menu.open = false;
  };
  const key = (event: KeyboardEvent) => {
    if (event.key !== 'Escape') return;
    for (const menu of openMenus()) {
      menu.open = false;
      menu.querySelector('summary')?.focus();
      event.preventDefault();
    }
  };
  addEventListener('pointerdown', press);
  addEventListener('keydown', key, { capture: true });
  return () => {
    removeEventListener('pointerdown', press);
    removeEventListener('keydown', key, { capture: true });
  };
}
