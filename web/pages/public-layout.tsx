import { ShopFrame } from '../components/shop-frame.js';

export function PublicLayout() {
  return <ShopFrame />;
}
