export { openStorage, type Storage, type Stored } from './client';
export { closeStorage, storage } from './instance';
