import { isQuantity, quantity } from '../../processing/catalogue';
import { formatNumber, formatUncertainty } from './numbers';

/** Inner value (SI, as results carry it) to the unit people read; null stays null. */
export function shownValue(key: string, innerValue: number | null | undefined): number | null {
  if (innerValue === null || innerValue === undefined || !Number.isFinite(innerValue)) return null;
  if (!isQuantity(key)) return innerValue;
  const { factor, offset } = quantity(key);
  return innerValue * factor + offset;
}

/** A spread (standard deviation, difference) to the unit people read: no offset. */
export function shownSpread(key: string, innerSpread: number | null | undefined): number | null {
  if (innerSpread === null || innerSpread === undefined || !Number.isFinite(innerSpread)) return null;
  return isQuantity(key) ? Math.abs(innerSpread * quantity(key).factor) : innerSpread;
}

/** "−12.2" with the catalogue's decimals; '' when missing. */
export function formatQuantity(key: string, innerValue: number | null | undefined): string {
  return formatNumber(shownValue(key, innerValue), isQuantity(key) ? quantity(key).decimals : 2);
}

/** "± 1.9" in the unit and decimals of the quantity it belongs to. */
export function formatQuantityUncertainty(key: string, innerSpread: number | null | undefined): string {
  return formatUncertainty(shownSpread(key, innerSpread), isQuantity(key) ? quantity(key).decimals : 2);
}

/** Unit to show; '' for a bare ratio. */
export function unitOf(key: string): string {
  const unit = isQuantity(key) ? quantity(key).unit : '';
  return unit === '1' ? '' : unit;
}
